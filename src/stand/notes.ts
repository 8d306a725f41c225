import { formatDuration } from '../engine/format.js';
import type { Stand } from './types.js';

/** What is no fault in a stand, but may not be what was meant. Sentences. */
export function notes({ sources, channels }: Stand): string[] {
  const found: string[] = [];
  for (const { name } of sources) if (!channels.some(({ origin }) => origin.source === name)) found.push(`No channel comes from the source ${name}.`);
  const origins = new Map<string, string>();
  for (const { origin, spec } of channels) {
    const { channel, range, tolerance, band, resolution, silentAfter } = spec;
    const key = JSON.stringify([origin.source, origin.field, origin.topic, origin.value]);
    const twin = origins.get(key);
    if (twin !== undefined) found.push(`${channel} reads the same as ${twin}.`);
    origins.set(key, channel);
    if ('centre' in band) {
      const { centre, sigma } = band;
      if (range && (centre < range[0] || centre > range[1])) found.push(`The centre of ${channel}, ${centre}, lies outside what the instrument can report.`);
      if (tolerance && (centre < tolerance[0] || centre > tolerance[1])) found.push(`The centre of ${channel}, ${centre}, lies outside its tolerance.`);
      if (resolution !== null && resolution > 2 * sigma) found.push(`${channel} is read in steps of ${resolution}, coarser than two sigmas: most changes of its band will not show.`);
    }
    if (range && tolerance && (tolerance[1] < range[0] || tolerance[0] > range[1])) found.push(`The tolerance of ${channel} lies outside what the instrument can report.`);
    if (silentAfter === null) found.push(`${channel} does not say how often it is read (every:), so its silence is not watched.`);
    if ('learn' in band && spec.every !== null && band.learn * spec.every > 3_600_000)
      found.push(`${channel} settles for ${formatDuration(band.learn * spec.every)}: until then only its scale, tolerance and silence are watched.`);
  }
  return found;
}
