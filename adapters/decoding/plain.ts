import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import type { Wanted } from '../source.js';
import type { LineDecoder } from './lineDecoder.js';
import { readNumber } from './number.js';

/**
 * Lines that are one number each.
 * @throws UserError where a channel asks for a field of them
 */
export function compileNumber(wanted: readonly Wanted[]): LineDecoder {
  for (const { channel, field } of wanted)
    if (field !== null)
      throw new UserError(
        `Channel ${clean(channel, 60)} wants the field '${clean(field, 60)}' of a source whose lines are one number each.`,
        'Name the source alone in `from`, or say `lines: csv`, `pairs` or `json` at the source.',
      );
  const out = new Float64Array(1);
  return {
    decode(bytes, start, end, emit, refuse) {
      if (!readNumber(bytes, start, end, out)) refuse('not-a-number', bytes, start, end);
      else for (let i = 0; i < wanted.length; i++) emit(i, out[0]!, NaN);
    },
  };
}
