/**
 * Seeded noise for the simulated cell. A reading's deviate depends on the seed, the stream (one for each instrument) and
 * the step alone, so that any part of a run can be made again without the part before it. Not for cryptography.
 */

/**
 * A uniform deviate strictly between 0 and 1: a counter hashed by the finaliser of MurmurHash3 (A. Appleby, 2011; public
 * domain), once for each of seed, stream and step, so that neighbours in none of them resemble each other.
 * @param seed @param stream @param step whole numbers, of which the lower 32 bits count
 */
export function uniform(seed: number, stream: number, step: number): number {
  let x = mix((seed ^ 0x9e3779b9) >>> 0);
  x = mix((x + Math.imul(stream + 1, 0x85ebca77)) >>> 0);
  x = mix((x + Math.imul(step + 1, 0x9e3779b1)) >>> 0);
  return (x + 0.5) / 4294967296;
}

/** A standard normal deviate: Box and Muller, Annals of Mathematical Statistics 29(2), 1958. Within 6.7 sigmas. */
export function normal(seed: number, stream: number, step: number): number {
  const radius = Math.sqrt(-2 * Math.log(uniform(seed, 2 * stream, step)));
  return radius * Math.cos(2 * Math.PI * uniform(seed, 2 * stream + 1, step));
}

function mix(word: number): number {
  let x = word;
  x = Math.imul(x ^ (x >>> 16), 0x85ebca6b);
  x = Math.imul(x ^ (x >>> 13), 0xc2b2ae35);
  return (x ^ (x >>> 16)) >>> 0;
}
