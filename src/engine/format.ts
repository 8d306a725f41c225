/** Numbers for people. Machines get full precision instead. */

/**
 * A value with the digits that mean something: those of the resolution, else down to a twentieth of a sigma, else six
 * significant ones.
 */
export function formatValue(value: number, sigma: number | null = null, resolution: number | null = null): string {
  if (Number.isNaN(value)) return 'not a number';
  if (!Number.isFinite(value)) return value > 0 ? 'over range' : 'under range';
  const step = resolution !== null && resolution > 0 ? resolution : sigma !== null && sigma > 0 ? sigma / 20 : null;
  const size = Math.abs(value);
  if (size >= 1e9 || (size > 0 && size < 1e-6)) return trim(value.toExponential(3));
  if (step === null) return trim(value.toPrecision(6));
  const digits = Math.max(0, Math.min(9, Math.ceil(-Math.log10(step) - 1e-9)));
  return value.toFixed(digits);
}

/** Without a tail of zeros in the fraction, and without a plus in the exponent, whose own zeros stay. */
function trim(text: string): string {
  const [mantissa = '', exponent] = text.split('e');
  const short = mantissa.includes('.') ? mantissa.replace(/\.?0+$/, '') : mantissa;
  return exponent === undefined ? short : `${short}e${exponent.replace('+', '')}`;
}

/** Odds as "1 in 15 800": three significant digits, thousands set apart; "1 in 4e12" when that is longer than useful. */
export function formatOdds(p: number): string {
  if (!(p > 0)) return 'next to none';
  if (p >= 0.995) return '1 in 1';
  const n = 1 / p;
  if (!Number.isFinite(n)) return '1 in more than 1e308';
  return `1 in ${formatCount(n)}`;
}

/** A count to three significant digits with thousands set apart. */
export function formatCount(n: number): string {
  if (n >= 1e9) return trim(n.toExponential(1));
  if (n < 10) return trim(n.toPrecision(2));
  const rounded = n < 100 ? Math.round(n) : Number(n.toPrecision(3));
  return groups(rounded);
}

/** A whole number with its thousands set apart by thin gaps. */
export function groups(n: number): string {
  return n.toFixed(0).replace(/\B(?=(\d{3})+$)/g, ' ');
}

/** A span of time: the two largest units that matter. */
export function formatDuration(ms: number): string {
  if (!Number.isFinite(ms)) return 'an unknown time';
  const seconds = Math.abs(ms) / 1000;
  if (seconds < 0.9995) return `${Math.round(seconds * 1000)} ms`;
  if (seconds < 59.95) return `${trim(seconds.toFixed(1))} s`;
  const s = Math.round(seconds);
  if (s < 3600) return pair(Math.floor(s / 60), 'min', s % 60, 's');
  if (s < 86_400) return pair(Math.floor(s / 3600), 'h', Math.floor((s % 3600) / 60), 'min');
  return pair(Math.floor(s / 86_400), 'd', Math.floor((s % 86_400) / 3600), 'h');
}

const pair = (large: number, unit: string, small: number, subunit: string): string =>
  small === 0 ? `${large} ${unit}` : `${large} ${unit} ${small} ${subunit}`;

/** Deviation in sigmas, with its sign. */
export function formatZ(z: number): string {
  const size = Math.abs(z);
  const text = size >= 1e4 ? trim(size.toExponential(1)) : size >= 100 ? size.toFixed(0) : size.toFixed(1);
  return `${z < 0 ? '-' : '+'}${text}`;
}
