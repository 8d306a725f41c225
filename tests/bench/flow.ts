import { ZONE_RULES } from '../../src/engine/rules.js';
import type { ChannelSpec } from '../../src/engine/spec.js';

/** The channel that benches watch with everything on but what they say themselves. */
export const FLOW: ChannelSpec = {
  channel: 'flow',
  unit: 'L/min',
  every: 100,
  silentAfter: 2000,
  range: [0, 60],
  tolerance: [30, 50],
  resolution: 0.01,
  band: { centre: 41.2, sigma: 0.31 },
  rules: ZONE_RULES,
  k: 3,
  sideRun: 8,
  frozen: true,
  frozenOdds: 1e-9,
  window: 500,
  clearAfter: 10,
};
