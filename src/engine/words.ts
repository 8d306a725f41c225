import type { Band } from './band.js';
import { formatDuration, formatOdds, formatValue, formatZ, groups } from './format.js';
import type { Detector, Side } from './rules.js';
import type { ChannelSpec } from './spec.js';

/** What a sentence about an alarm may draw on. */
export interface Facts {
  readonly detector: Detector;
  readonly side: Side | null;
  readonly value: number | null;
  readonly z: number | null;
  readonly odds: number | null;
  readonly band: Band | null;
  /** ln of the probability that noise alone does this; null where it is that of z. */
  readonly lnOdds: number | null;
  /** What the detector judged by, as the evidence has it. */
  readonly limits: Readonly<Record<string, number>>;
}

/** An alarm in plain words: what happened, with the value, how far out, and how seldom that happens by chance. */
export function raisedSentence(spec: ChannelSpec, facts: Facts): string {
  const { channel } = spec;
  const { detector, side, value, z, odds, band, limits } = facts;
  const quantity = (x: number): string => `${formatValue(x, band?.sigma ?? null, spec.resolution)}${spec.unit && ' ' + spec.unit}`;
  const now = value === null ? '' : quantity(value);
  const far =
    z === null || band === null
      ? ''
      : `${formatZ(z)} sigma from the centre ${quantity(band.centre)}${odds === null ? '' : ` (${formatOdds(odds)})`}`;
  const where = side === 'high' ? 'above' : 'below';
  switch (detector) {
    case 'one-beyond-3':
      return `${channel} is ${where} its control limit ${band ? quantity(side === 'high' ? band.high : band.low) : ''}: ${now}, ${far}.`;
    case 'inconsistent':
      return `${channel} does not agree with its baseline of ${band?.n ?? 'unknown'} readings: ${now}, ${far}.`;
    case 'two-of-three-beyond-2':
      return `Two of the last three readings of ${channel} lie far ${where} the centre: now ${now}, ${far}.`;
    case 'four-of-five-beyond-1':
      return `Four of the last five readings of ${channel} lie well ${where} the centre: now ${now}, ${far}.`;
    case 'eight-one-side':
      return `The last ${spec.sideRun} readings of ${channel} all lie ${where} the centre: it has shifted or drifts; now ${now}, ${far}.`;
    case 'nine-one-side':
      return `The last nine readings of ${channel} all lie ${where} the centre: it has shifted or drifts; now ${now}, ${far}.`;
    case 'trend-of-6':
      return `Six readings of ${channel} in a row ${side === 'high' ? 'rise' : 'fall'}: it drifts; now ${now}, ${far}.`;
    case 'alternating-14':
      return `Fourteen readings of ${channel} in a row go up and down in turn: two causes seem to alternate; now ${now}.`;
    case 'fifteen-within-1':
      return `Fifteen readings of ${channel} in a row stay near the centre: its spread has become smaller than the band's; now ${now}.`;
    case 'eight-outside-1':
      return `Eight readings of ${channel} in a row avoid the centre: its spread has become larger, or two states alternate; now ${now}.`;
    case 'frozen':
      return `${channel} has shown ${now} for ${groups((limits.repeats ?? 0) + 1)} readings: noise alone would repeat it so ${chance(facts.lnOdds ?? 0)}; the sensor seems frozen.`;
    case 'silent':
      return `Nothing has come from ${channel} for ${formatDuration(limits.silence ?? NaN)}${spec.every === null ? '' : `; a reading is due every ${formatDuration(spec.every)}`}.`;
    case 'off-scale':
      return value === null || !Number.isFinite(value)
        ? `${channel} reports ${value === null ? 'no number' : formatValue(value)}: the instrument cannot measure.`
        : `${channel} reports ${now}, outside what the instrument can report (${quantity(spec.range![0])} to ${quantity(spec.range![1])}).`;
    case 'tolerance':
      return `${channel} is outside its tolerance of ${quantity(spec.tolerance![0])} to ${quantity(spec.tolerance![1])}: ${now}${far && ', ' + far}.`;
  }
}

/** p = exp(ln p) in words; p may be far below the smallest double. */
function chance(lnOdds: number): string {
  if (lnOdds > -690) return formatOdds(Math.exp(lnOdds));
  return `1 in 1e${Math.round(-lnOdds / Math.LN10)}`;
}

/** The end of an alarm in plain words. */
export function clearedSentence(spec: ChannelSpec, detector: Detector, lasted: number, signals: number): string {
  const over = `after ${formatDuration(lasted)}`;
  switch (detector) {
    case 'silent':
      return `${spec.channel} speaks again ${over}.`;
    case 'off-scale':
      return `${spec.channel} is on its scale again ${over}.`;
    case 'tolerance':
      return `${spec.channel} is inside its tolerance again ${over}.`;
    case 'frozen':
      return `${spec.channel} moves again ${over}.`;
    default:
      return `${spec.channel} is back in its band ${over} (${signals} signal${signals === 1 ? '' : 's'} of ${detector}).`;
  }
}

/** The end of settling in plain words. */
export function bandSentence(spec: ChannelSpec, band: Band | null): string {
  if (band === null)
    return `${spec.channel} showed one value throughout its baseline, so no band can be learned: check the sensor, give its resolution or a band. Settling starts again.`;
  const { centre, sigma, n, centreUncertainty, sigmaUncertainty, low, high, k } = band;
  const unit = spec.unit && ' ' + spec.unit;
  const digits = (x: number): string => formatValue(x, sigma, null);
  const fine = (x: number): string => formatValue(x, sigma / 100, null);
  return (
    `${spec.channel} has its band from ${n} readings: centre ${digits(centre)} ± ${fine(centreUncertainty ?? 0)}${unit}, ` +
    `sigma ${fine(sigma)} ± ${fine(sigmaUncertainty ?? 0)}${unit}, limits ${digits(low)} to ${digits(high)}${unit} (${k} sigma).`
  );
}
