import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import { nearest } from '../../src/text/nearest.js';
import type { Wanted } from '../source.js';

/** Which column of a recording holds which channel. */
export interface Columns {
  /** For each column the slot of its channel; -1: nobody's. */
  readonly slots: Int32Array;
  /** Place of the time column; -1: there is none. */
  readonly time: number;
  /** Long form: places of the channel's name and of the value; else null. */
  readonly long: { readonly channel: number; readonly value: number } | null;
}

/** Names by which a channel is looked for in a recording, best first. */
export const namesOf = ({ field, channel }: Wanted): string[] => (field === null || field === channel ? [channel] : [field, channel]);

/**
 * Finds the channels in a recording's header.
 * @throws UserError where no column is a channel's: which columns there are, and the nearest name
 */
export function findColumns(header: readonly string[], wanted: readonly Wanted[], file: string): Columns {
  const names = header.map((column) => column.trim());
  const time = names.indexOf('time');
  if (names.length === 3 && time >= 0 && names.includes('channel') && names.includes('value'))
    return { slots: new Int32Array(3).fill(-1), time, long: { channel: names.indexOf('channel'), value: names.indexOf('value') } };
  const slots = new Int32Array(names.length).fill(-1);
  let found = 0;
  for (const channel of wanted) {
    const column = namesOf(channel)
      .map((name) => names.indexOf(name))
      .find((at) => at >= 0 && slots[at] === -1 && at !== time);
    if (column === undefined) continue;
    slots[column] = channel.slot;
    found++;
  }
  if (found === 0) throw noColumn(names, wanted, file);
  return { slots, time, long: null };
}

function noColumn(names: readonly string[], wanted: readonly Wanted[], file: string): UserError {
  const first = wanted[0];
  const near = first ? nearest(namesOf(first)[0]!, names) : null;
  return new UserError(
    `No column of ${clean(file, 200)} is a channel: it has ${clean(names.slice(0, 40).join(', ') || 'none', 300)}.`,
    near && first
      ? `Is '${clean(near, 60)}' the channel ${clean(first.channel, 60)}? Columns and channels must bear the same name.`
      : 'The first line names the columns; columns and channels must bear the same name.',
  );
}
