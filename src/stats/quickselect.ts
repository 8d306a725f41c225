/**
 * Rearranges values[0..n) so that values[k] is the k-th smallest (from 0) and returns it. Hoare's selection (CACM 4(7),
 * 1961) with the median of three as pivot: linear expected time, nothing allocated. No NaN may be among the values.
 */
export function select(values: Float64Array, n: number, k: number): number {
  let left = 0;
  let right = n - 1;
  while (left < right) {
    const middle = (left + right) >> 1;
    const a = values[left]!;
    const b = values[middle]!;
    const c = values[right]!;
    const pivot = a < b ? (b < c ? b : a < c ? c : a) : a < c ? a : b < c ? c : b;
    let i = left;
    let j = right;
    while (i <= j) {
      while (values[i]! < pivot) i++;
      while (values[j]! > pivot) j--;
      if (i <= j) {
        const swap = values[i]!;
        values[i] = values[j]!;
        values[j] = swap;
        i++;
        j--;
      }
    }
    if (k <= j) right = j;
    else if (k >= i) left = i;
    else break;
  }
  return values[k]!;
}

/** The two middle values of values[0..n) in order, which are rearranged; the same value twice where n is odd; NaN for n = 0. */
export function middle(values: Float64Array, n: number): readonly [lower: number, upper: number] {
  if (n === 0) return [NaN, NaN];
  const upper = select(values, n, n >> 1);
  if (n % 2 === 1) return [upper, upper];
  let lower = -Infinity;
  for (let i = 0; i < n >> 1; i++) if (values[i]! > lower) lower = values[i]!;
  return [lower, upper];
}

/** Median of values[0..n), which are rearranged. The mean of the middle two where n is even; NaN for n = 0. */
export function median(values: Float64Array, n: number): number {
  const [lower, upper] = middle(values, n);
  return lower / 2 + upper / 2;
}

/**
 * Median absolute deviation from the median, unscaled. The median is given by its two middle values, so that it need not
 * be rounded: at an offset of 1e9 half a last place of it is a thousandth of a sigma of 1e-4.
 * Overwrites values[0..n) with the deviations.
 */
export function mad(values: Float64Array, n: number, [lower, upper]: readonly [number, number]): number {
  for (let i = 0; i < n; i++) values[i] = Math.abs(values[i]! - lower + (values[i]! - upper)) / 2;
  return median(values, n);
}
