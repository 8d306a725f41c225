import type { LineOptions } from '../options.js';
import type { Fault, Wanted } from '../source.js';
import { compileCsv } from './csv.js';
import { compileJson } from './json.js';
import { compileNumber } from './plain.js';
import { compilePairs } from './pairs.js';

/**
 * Takes a number that a channel wants: the channel's place in the list that the decoder was compiled for, the value
 * (finite, or NaN or an infinity for an off-scale instrument), and the device's own time in ms since the epoch, or NaN
 * where the time of arrival holds.
 */
export type Emit = (wanted: number, value: number, time: number) => void;

/** Takes what was no reading, with the bytes it was found in. */
export type Refuse = (fault: Fault, bytes: Buffer, start: number, end: number) => void;

/** Turns one line (without its end, valid UTF-8) into readings and faults. Keeps nothing from line to line. */
export interface LineDecoder {
  decode(bytes: Buffer, start: number, end: number, emit: Emit, refuse: Refuse): void;
}

/**
 * Compiles a decoder for the fields that the channels want.
 *
 * - `number`: the line is one number.
 * - `csv`: numbers between commas, named by `columns`; blanks around them do not count, further columns are let be.
 * - `pairs`: names and numbers, as in `T=21.45 RH=40.1%`.
 * - `json`: one JSON document, fields by key or JSON pointer.
 *
 * What a channel wants but the line lacks is the fault `missing-field`, once for each channel; what is there but is no
 * number, `not-a-number`. The rest of the line still counts.
 * @throws UserError where a channel wants what the lines cannot hold
 */
export function compileDecoder(options: LineOptions, wanted: readonly Wanted[]): LineDecoder {
  switch (options.lines) {
    case 'number':
      return compileNumber(wanted);
    case 'csv':
      return compileCsv(options.columns, wanted);
    case 'pairs':
      return compilePairs(wanted);
    case 'json':
      return compileJson(wanted);
  }
}
