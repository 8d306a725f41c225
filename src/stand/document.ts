import { readFileSync, statSync } from 'node:fs';
import { LineCounter, parseDocument, type Document, isMap, isScalar, type YAMLError } from 'yaml';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import { StandFaults, type StandFault } from './faults.js';

const LARGEST = 1 << 20;
export type Path = readonly PropertyKey[];

/** A stand file as parsed YAML which knows where each of its parts stands. */
export class StandDocument {
  private constructor(
    readonly file: string,
    private readonly document: Document.Parsed,
    private readonly lines: LineCounter,
  ) {}

  /**
   * @throws UserError where the file cannot be read at all
   * @throws StandFaults where it is no YAML
   */
  static read(file: string): StandDocument {
    const lines = new LineCounter();
    const document = parseDocument(readText(file), { lineCounter: lines, strict: true, uniqueKeys: true, merge: false, prettyErrors: false });
    const read = new StandDocument(file, document, lines);
    if (document.errors.length > 0)
      throw new StandFaults(
        file,
        document.errors.slice(0, 20).map((error) => read.syntaxFault(error)),
      );
    return read;
  }

  /** The plain value. Aliases are bounded: a few lines cannot become a million. @throws StandFaults */
  value(): unknown {
    try {
      return this.document.toJS({ maxAliasCount: 50 }) as unknown;
    } catch {
      throw new StandFaults(this.file, [
        { line: 1, column: 1, where: '', what: 'The aliases (*name) of this file unfold without measure.', mend: 'Write the parts out.' },
      ]);
    }
  }

  /** Where the value at `path` stands; the nearest part above it where there is none. */
  place(path: Path): { line: number; column: number } {
    for (let length = path.length; length >= 0; length--) {
      const node = this.document.getIn(path.slice(0, length), true) as { range?: readonly number[] | null } | undefined;
      if (node?.range && length > 0) return this.position(node.range[0]!);
    }
    return { line: 1, column: 1 };
  }

  /** Where the key `key` of the mapping at `path` stands. */
  placeOfKey(path: Path, key: PropertyKey): { line: number; column: number } {
    const node = path.length === 0 ? this.document.contents : this.document.getIn(path, true);
    if (isMap(node))
      for (const { key: name } of node.items) if (isScalar(name) && String(name.value) === String(key) && name.range) return this.position(name.range[0]);
    return this.place(path);
  }

  private position(offset: number): { line: number; column: number } {
    const { line, col } = this.lines.linePos(offset);
    return { line: Math.max(1, line), column: Math.max(1, col) };
  }

  private syntaxFault(error: YAMLError): StandFault {
    const place = this.position(error.pos[0]);
    const [what, mend] = SYNTAX[error.code] ?? ['Here the file is no YAML: ' + clean(error.message, 120) + '.', 'Look at the indentation, the colons and the quotes of this line.'];
    return { ...place, where: '', what, mend };
  }
}

/** Sentences for the faults of YAML that people make. */
const SYNTAX: Readonly<Record<string, readonly [what: string, mend: string]>> = {
  DUPLICATE_KEY: ['This key stands twice.', 'Take one of the two out.'],
  TAB_AS_INDENT: ['A tab stands where the indentation should be.', 'Indent with blanks.'],
  BAD_INDENT: ['The indentation does not fit the lines above.', 'Parts of one list or mapping begin in the same column.'],
  MISSING_CHAR: ['A quote, bracket or brace is not closed, or a colon is missing.', 'Close it, or put the text in quotes.'],
  MULTILINE_IMPLICIT_KEY: ['A key goes over more than one line.', 'Put the colon on the same line, or close the bracket before it.'],
  BLOCK_AS_IMPLICIT_KEY: ['A colon stands where none can be.', 'Put text that holds a colon in quotes.'],
  UNEXPECTED_TOKEN: ['This does not belong here.', 'Look at the brackets and quotes before it.'],
  BAD_ALIAS: ['An alias (*name) has no anchor (&name).', 'Text that begins with * or & goes in quotes.'],
  BAD_SCALAR_START: ['Text cannot begin with this character.', 'Put it in quotes.'],
};

function readText(file: string): string {
  const name = clean(file, 200);
  let bytes: Buffer;
  try {
    const { size } = statSync(file);
    if (size > LARGEST) throw new UserError(`${name} is larger than 1 MiB, too large for a stand file.`, 'Was a recording meant? kilter replay reads recordings.');
    bytes = readFileSync(file);
  } catch (error) {
    if (error instanceof UserError) throw error;
    const { code } = error as NodeJS.ErrnoException;
    if (code === 'ENOENT') throw new UserError(`There is no file ${name}.`, 'Name a stand file; config/ holds examples.');
    if (code === 'EISDIR') throw new UserError(`${name} is a folder.`, 'Name a stand file in it.');
    if (code === 'EACCES') throw new UserError(`${name} may not be read by this user.`, 'Give it read permission (chmod).');
    throw new UserError(`${name} cannot be read (${code ?? 'unknown reason'}).`);
  }
  let text: string;
  try {
    text = new TextDecoder('utf-8', { fatal: true }).decode(bytes);
  } catch {
    throw new UserError(`${name} is not written in UTF-8.`, 'Save it as UTF-8 text.');
  }
  if (text.trim() === '') throw new UserError(`${name} is empty.`, 'A stand file has at least stand, sources and channels; config/ holds examples.');
  return text;
}
