import type { ErrorCode } from 'yaml';

/** Sentences for the faults of YAML that people make: what is wrong, and the mend. */
export const SYNTAX: Readonly<Partial<Record<ErrorCode, readonly [what: string, mend: string]>>> = {
  TAB_AS_INDENT: ['A tab stands where the indentation should be.', 'Indent with blanks.'],
  BAD_INDENT: ['The indentation does not fit the lines above.', 'Parts of one list or mapping begin in the same column.'],
  MISSING_CHAR: ['A quote, bracket or brace is not closed, or a colon is missing.', "Close it, write ': ' after a key, or put the text in quotes."],
  MULTILINE_IMPLICIT_KEY: ['A key goes over more than one line.', 'Put the colon on the same line, or close the bracket before it.'],
  BLOCK_AS_IMPLICIT_KEY: ['A colon stands where none can be.', 'Put text that holds a colon in quotes.'],
  BLOCK_IN_FLOW: ['Indented lines stand within brackets.', 'Close the bracket first.'],
  UNEXPECTED_TOKEN: ['This does not belong here.', 'Look at the brackets and quotes before it.'],
  BAD_ALIAS: ['An alias (*name) has no anchor (&name) before it.', 'Text that begins with * or & goes in quotes.'],
  BAD_SCALAR_START: ['Text cannot begin with this character.', 'Put it in quotes.'],
  BAD_DQ_ESCAPE: ['A backslash in double quotes begins an escape, and this is none.', 'Write two backslashes, or use single quotes.'],
  KEY_OVER_1024_CHARS: ['A key is longer than 1024 characters.', 'Was a quote or bracket left open?'],
  MULTIPLE_DOCS: ["A second document begins here ('---').", 'A stand file is one document: take it out, or make it a file of its own.'],
  TAG_RESOLVE_FAILED: ['A mark that begins with ! means nothing here.', 'Take it out, or put the text in quotes.'],
  BAD_COLLECTION_TYPE: ['A mark that begins with ! means nothing here.', 'Take it out, or put the text in quotes.'],
  BAD_DIRECTIVE: ['A line that begins with % means nothing here.', 'Take it out.'],
};

/** For every other fault of YAML. */
export const NO_YAML = ['Here the file is no YAML.', 'Look at the indentation, the colons and the quotes of this line and the one before it.'] as const;

export const TWICE = ['This key stands twice.', 'Take one of the two out.'] as const;
export const STRANGE = ['This cannot be a key.', 'A key is a word before a colon, not a list, a mapping or __proto__.'] as const;
export const TOO_DEEP = ['The parts of this file lie in each other deeper than those of any stand file.', 'Was a bracket left open?'] as const;
export const OLD_YAML = ['The file says that it is written in an older YAML, in which yes is true and 1:30 is a number.', "Take the line '%YAML' out."] as const;
export const UNFOLDS = ['The aliases (*name) of this file unfold without measure.', 'Write the parts out.'] as const;
