import type { Channel } from '../engine/channel.js';
import type { EngineEvent } from '../engine/events.js';

const NONE: readonly EngineEvent[] = [];

/**
 * Finds a silence of a channel before `time`, by the readings' own times and as of the moment at which it was one. Used
 * where readings bring their time (recordings), so that a silence is found at the same moment on every run.
 * @returns what the channel says of it; nothing where there was none
 */
export function tickBefore(channel: Channel, time: number): readonly EngineEvent[] {
  const { silentAfter } = channel.spec;
  const last = channel.lastTime;
  if (silentAfter === null || last === null || !(time - last > silentAfter)) return NONE;
  return channel.tick(last + silentAfter + 1);
}
