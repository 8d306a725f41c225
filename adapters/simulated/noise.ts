/**
 * Seeded noise for the simulated cell. Uniform deviates by splitmix32 (the mixer of Steele, Lea and Flood, OOPSLA 2014,
 * at 32 bits), normal ones by Box and Muller, Annals of Mathematical Statistics 29(2), 1958. One reading's noise depends
 * on the seed, the channel and the reading's number alone, so that any part of a run can be made again.
 */
export function uniform(seed: number, stream: number, step: number): number {
  let x = (seed ^ Math.imul(stream + 1, 0x9e3779b9) ^ Math.imul(step + 1, 0x85ebca6b)) >>> 0;
  for (let round = 0; round < 2; round++) {
    x = (x + 0x9e3779b9) >>> 0;
    x = Math.imul(x ^ (x >>> 16), 0x21f0aaad);
    x = Math.imul(x ^ (x >>> 15), 0x735a2d97);
    x = (x ^ (x >>> 15)) >>> 0;
  }
  return (x + 0.5) / 4294967296;
}

/** A standard normal deviate. */
export function normal(seed: number, stream: number, step: number): number {
  const radius = Math.sqrt(-2 * Math.log(uniform(seed, 2 * stream, step)));
  return radius * Math.cos(2 * Math.PI * uniform(seed, 2 * stream + 1, step));
}
