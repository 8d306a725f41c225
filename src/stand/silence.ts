import type { Channel } from '../engine/channel.js';

/**
 * The time at which a channel became silent before a reading at `time`, by the readings' own times, or null.
 * Used where readings bring their time (recordings), so that a silence is found at the same moment on every run.
 */
export function silenceBefore(channel: Channel, time: number): number | null {
  const { silentAfter } = channel.spec;
  const last = channel.lastTime;
  if (silentAfter === null || last === null) return null;
  return time - last > silentAfter ? last + silentAfter + 1 : null;
}
