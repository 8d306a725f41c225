import type { EngineEvent } from '../engine/events.js';

/** ISO 8601 in UTC with milliseconds; null for a time beyond the calendar. */
export function isoTime(ms: number): string | null {
  return Math.abs(ms) <= 8.64e15 ? new Date(ms).toISOString() : null;
}

/**
 * An engine event as the alarm log and `--json` write it: times as ISO 8601, numbers that JSON lacks as null. Keys stand
 * in the order in which people look for them.
 */
export function toWire(event: EngineEvent): Record<string, unknown> {
  const { time, ...rest } = event;
  const at = isoTime(time);
  if (event.event === 'raised') {
    const { evidence, sentence, ...fields } = rest as Omit<typeof event, 'time'>;
    const readings = evidence.readings.map(({ index, time, value }) => ({ index, time: isoTime(time), value: Number.isFinite(value) ? value : null }));
    return { ...ordered(fields, at), evidence: { ...evidence, readings }, sentence };
  }
  return ordered(rest, at);
}

function ordered(fields: object, time: string | null): Record<string, unknown> {
  const { event, alarm, channel, index, ...rest } = fields as Record<string, unknown>;
  return { event, ...(alarm !== undefined && { alarm }), channel, index, time, ...rest };
}
