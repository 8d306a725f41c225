/** Standard normal deviates that are the same on every run (Box and Muller 1958 on a linear congruence; Numerical Recipes' constants). */
export function deviates(n: number, seed = 1): number[] {
  let state = seed >>> 0;
  const uniform = (): number => ((state = (Math.imul(state, 1664525) + 1013904223) >>> 0) + 0.5) / 2 ** 32;
  return Array.from({ length: n }, () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform()));
}

/** Rounded to steps of an instrument. */
export const rounded = (x: number, step: number): number => Math.round(x / step) * step;

/** Deviations that no rule minds: never three beyond 1 sigma near each other, no run, no trend, no long alternation. */
export function quiet(n: number): number[] {
  const turn = [0.3, 0.6, -0.4, 0.2, -0.7, -0.2, 1.2];
  return Array.from({ length: n }, (_, i) => turn[i % turn.length]! + (i % 5) / 100);
}
