/** Where in a file a fault lies. Line and column count from 1. */
export interface Place {
  readonly file: string;
  readonly line?: number;
  readonly column?: number;
}

/**
 * An error that a user can cause and mend: what is wrong, where, and what to do. The command line prints it as
 * sentences and never as a stack trace; any other error is a fault of the program.
 */
export class UserError extends Error {
  override readonly name = 'UserError';

  /**
   * @param what a sentence that says what is wrong
   * @param mend a sentence that says what to do about it
   * @param place the file, and the line and column in it, where they are known
   */
  constructor(
    readonly what: string,
    readonly mend?: string,
    readonly place?: Place,
  ) {
    super([place && at(place), what, mend].filter(Boolean).join(' '));
  }
}

/** `file:line:column:` as far as it is known. */
export function at(place: Place): string {
  return [place.file, place.line, place.column].filter((part) => part !== undefined).join(':') + ':';
}
