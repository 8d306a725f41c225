import { at, UserError } from '../text/errors.js';

/** One thing wrong in a stand file. Line and column count from 1; `where` is the way to it, as channels.flow.every. */
export interface StandFault {
  readonly line: number;
  readonly column: number;
  readonly where: string;
  /** What is wrong and how it is mended, as sentences. */
  readonly what: string;
  readonly mend: string | null;
}

/** A stand file with faults: all of them at once, in the order of the file. */
export class StandFaults extends UserError {
  constructor(
    readonly file: string,
    readonly faults: readonly StandFault[],
  ) {
    super(faults.map((fault) => faultLine(file, fault)).join('\n        '));
  }
}

/** A fault as one line: file:line:column, what is wrong, the mend. */
export function faultLine(file: string, { line, column, what, mend }: StandFault): string {
  return [at({ file: file.replace(/\p{Cc}/gu, '·'), line, column }), what, mend].filter(Boolean).join(' ');
}
