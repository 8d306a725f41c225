import type { Wanted } from '../source.js';
import type { LineDecoder } from './lineDecoder.js';
import { readJsonNumber } from './number.js';
import { follow, parsePointer, type Pointer } from './pointer.js';
import { readJsonTime } from './time.js';

/**
 * Lines that are one JSON document each. A channel's field is a key of it, or a JSON pointer when it begins with `/`;
 * the channel's `value` pointer goes before it; without either the document itself is the number. Numbers may be written as
 * strings. With a `time` pointer the device's own time is taken (see parseTime); a reading whose time is absent or wrong is
 * refused as `bad-time`, for a guessed time would be an invented one.
 * @throws UserError where a pointer is none
 */
export function compileJson(wanted: readonly Wanted[]): LineDecoder {
  const values = wanted.map(({ field, value }) => parsePointer(value ?? pointerOf(field)));
  const times = wanted.map(({ time }): Pointer | null => (time === null ? null : parsePointer(time)));
  const out = new Float64Array(1);

  return {
    decode(bytes, start, end, emit, refuse) {
      let document: unknown;
      try {
        document = JSON.parse(bytes.toString('utf8', start, end));
      } catch {
        refuse('bad-json', bytes, start, end);
        return;
      }
      for (let i = 0; i < values.length; i++) {
        const value = follow(document, values[i]!);
        const pointer = times[i];
        const time = pointer ? readJsonTime(follow(document, pointer)) : NaN;
        if (value === undefined) refuse('missing-field', bytes, start, end);
        else if (!readJsonNumber(value, out)) refuse('not-a-number', bytes, start, end);
        else if (pointer && Number.isNaN(time)) refuse('bad-time', bytes, start, end);
        else emit(i, out[0]!, time);
      }
    },
  };
}

function pointerOf(field: string | null): string {
  if (field === null) return '';
  return field.startsWith('/') ? field : `/${field.replaceAll('~', '~0').replaceAll('/', '~1')}`;
}
