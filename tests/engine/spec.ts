import type { ChannelSpec } from '../../src/engine/spec.js';

/** A channel to test with, all health detectors off unless asked for. */
export function spec(over: Partial<ChannelSpec> = {}): ChannelSpec {
  return {
    channel: 'flow',
    unit: 'L/min',
    every: 100,
    silentAfter: null,
    range: null,
    tolerance: null,
    resolution: null,
    band: { centre: 40, sigma: 0.5 },
    rules: ['one-beyond-3', 'two-of-three-beyond-2', 'four-of-five-beyond-1', 'eight-one-side'],
    k: 3,
    sideRun: 8,
    frozen: false,
    frozenOdds: 1e-9,
    window: 50,
    clearAfter: 5,
    ...over,
  };
}
