import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import { nearest } from '../../src/text/nearest.js';
import type { Wanted } from '../source.js';

const STRANGERS = 10_000; // names that are nobody's and yet remembered, so that a file of ever new names costs no memory
const NOBODY: readonly number[] = [];

/** Names by which a channel is looked for in a recording, best first. */
const namesOf = ({ field, channel }: Wanted): string[] => (field === null || field === channel ? [channel] : [field, channel]);

/**
 * Which name in a recording stands for which channels. A channel keeps the first of its names that was found; its
 * second name serves only where that is no other channel's first.
 */
export class ChannelNames {
  private readonly slots = new Map<string, readonly number[]>();
  private readonly found = new Set<number>();

  constructor(private readonly wanted: readonly Wanted[]) {}

  /** Takes note of names that stand together (a header, the keys of an object), best names first. */
  note(names: readonly string[]): void {
    for (const place of [0, 1])
      for (const name of names) {
        if ((this.slots.get(name) ?? NOBODY).length > 0) continue;
        const slots = this.wanted.filter((channel) => namesOf(channel)[place] === name && !this.found.has(channel.slot)).map(({ slot }) => slot);
        if (slots.length === 0 && this.slots.size >= STRANGERS) continue;
        this.slots.set(name, slots);
        for (const slot of slots) this.found.add(slot);
      }
  }

  /** The channels for which a name stands; none: it is nobody's. */
  of(name: string): readonly number[] {
    const known = this.slots.get(name);
    if (known !== undefined) return known;
    this.note([name]);
    return this.slots.get(name) ?? NOBODY;
  }

  /** Whether any name has been seen. */
  get saw(): boolean {
    return this.slots.size > 0;
  }

  /** Slots of channels of which the recording has shown nothing so far. */
  get absent(): number[] {
    return this.wanted.map(({ slot }) => slot).filter((slot) => !this.found.has(slot));
  }

  /** @throws UserError where no name so far is a channel's: which names there were, and the nearest */
  require(file: string, kind: 'column' | 'row'): void {
    if (this.found.size > 0) return;
    const names = [...this.slots.keys()].filter((name) => name !== 'time' && name !== '');
    const near = this.wanted
      .flatMap(namesOf)
      .map((channel) => ({ channel, name: nearest(channel, names) }))
      .find(({ name }) => name !== null);
    throw new UserError(
      `No ${kind} of ${clean(file, 200)} is of a channel: it has ${clean(names.slice(0, 40).join(', ') || 'none', 300)}.`,
      near
        ? `Is '${clean(near.name, 60)}' the channel ${clean(near.channel, 60)}? They must bear the same name.`
        : 'The recording must bear the names of the channels.',
    );
  }
}

/** Where in a CSV recording what is. */
export interface Columns {
  /** How many columns the header has. */
  readonly width: number;
  /** Place of the time column; -1: there is none. */
  readonly time: number;
  /** Wide form: columns that hold a channel, and its slot; a column may hold several channels. */
  readonly places: Int32Array;
  readonly slots: Int32Array;
  /** Long form, a reading a row: places of the channel's name and of the value; else null. */
  readonly long: { readonly channel: number; readonly value: number } | null;
  /** The last column that is of use. */
  readonly last: number;
}

/**
 * Finds the channels in a CSV recording's header.
 * @throws UserError where no column is a channel's
 */
export function findColumns(header: readonly string[], channels: ChannelNames, file: string): Columns {
  const names = header.map((column) => column.trim());
  const time = names.indexOf('time');
  const [width, none] = [names.length, new Int32Array(0)];
  const [channel, value] = [names.indexOf('channel'), names.indexOf('value')];
  if (width === 3 && time >= 0 && channel >= 0 && value >= 0) return { width, time, places: none, slots: none, long: { channel, value }, last: 2 };
  channels.note(names.filter((name) => name !== 'time'));
  channels.require(file, 'column');
  const cells = names.flatMap((name, place) =>
    place === time || names.indexOf(name) < place ? [] : channels.of(name).map((slot) => ({ place, slot })),
  );
  const places = Int32Array.from(cells, ({ place }) => place);
  return { width, time, places, slots: Int32Array.from(cells, ({ slot }) => slot), long: null, last: Math.max(time, ...places) };
}
