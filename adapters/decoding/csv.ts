import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import { nearest } from '../../src/text/nearest.js';
import type { Wanted } from '../source.js';
import type { LineDecoder } from './lineDecoder.js';
import { isBlank, readNumber } from './number.js';

const COMMA = 0x2c;
const SKIPPED = '-';

/**
 * Lines of numbers between commas. A column whose text is its own name is a heading, no fault.
 * @param columns the names in order; `-` skips a column
 * @throws UserError where a channel wants a column that has no name, or the columns are not named
 */
export function compileCsv(columns: readonly string[] | null, wanted: readonly Wanted[]): LineDecoder {
  const named = (columns ?? []).filter((name) => name !== SKIPPED);
  if (columns === null || named.length === 0)
    throw new UserError('A source with `lines: csv` does not name its columns.', 'Add `columns: [flow, inlet]` with the names in order.');
  const takers: number[][] = columns.map(() => []);
  wanted.forEach((want, i) => takers[find(columns, named, want)]!.push(i));
  const names = columns.map((name) => Buffer.from(name));
  const count = takers.findLastIndex((list) => list.length > 0) + 1; // columns after the last wanted one are not looked at
  const out = new Float64Array(1);

  return {
    decode(bytes, start, end, emit, refuse) {
      let from = start;
      for (let column = 0; column < count; column++) {
        const takes = takers[column]!;
        if (from > end) {
          for (let i = 0; i < takes.length; i++) refuse('missing-field', bytes, start, end);
          continue;
        }
        let to = from;
        while (to < end && bytes[to] !== COMMA) to++;
        if (takes.length > 0) {
          if (readNumber(bytes, from, to, out)) for (let i = 0; i < takes.length; i++) emit(takes[i]!, out[0]!, NaN);
          else if (!isHeading(bytes, from, to, names[column]!))
            for (let i = 0; i < takes.length; i++) refuse('not-a-number', bytes, from, to);
        }
        from = to + 1;
      }
    },
  };
}

function find(columns: readonly string[], named: readonly string[], { channel, field }: Wanted): number {
  if (field === null && named.length === 1) return columns.indexOf(named[0]!);
  const column = field === null || field === SKIPPED ? -1 : columns.indexOf(field);
  if (column >= 0) return column;
  const near = field === null ? null : nearest(field, named);
  throw new UserError(
    field === null
      ? `Channel ${clean(channel, 60)} does not say which column it wants.`
      : `Channel ${clean(channel, 60)} wants the column '${clean(field, 60)}', which is not named in \`columns\`.`,
    near === null
      ? `Write it after the source, as in \`from: source/${clean(named[0], 60)}\`.`
      : `Did you mean '${clean(near, 60)}'?`,
  );
}

function isHeading(bytes: Buffer, start: number, end: number, name: Buffer): boolean {
  let at = start;
  let last = end;
  while (at < last && isBlank(bytes[at]!)) at++;
  while (last > at && isBlank(bytes[last - 1]!)) last--;
  return last - at === name.length && bytes.compare(name, 0, name.length, at, last) === 0;
}
