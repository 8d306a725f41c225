import { LineCounter, parseDocument, type Document } from 'yaml';
import { StandFaults, type StandFault } from './faults.js';
import { tooDeep } from './nesting.js';
import { Places, type Path } from './places.js';
import { readText } from './readText.js';
import { NO_YAML, OLD_YAML, STRANGE, SYNTAX, TOO_DEEP, TWICE, UNFOLDS } from './syntax.js';

const MOST = 20; // faults of YAML that are told: one often leads to the next
const MOST_ALIASES = 10_000;

/** A stand file as parsed YAML which knows where each of its parts stands. */
export class StandDocument {
  private readonly places: Places;
  private plain: unknown;

  private constructor(
    readonly file: string,
    private readonly document: Document.Parsed,
    private readonly lines: LineCounter,
  ) {
    this.places = new Places(document.contents);
  }

  /**
   * @throws UserError where the file cannot be read at all
   * @throws StandFaults where it is no YAML
   */
  static read(file: string): StandDocument {
    const text = readText(file);
    const lines = new LineCounter();
    const deep = tooDeep(text);
    if (deep !== null) throw new StandFaults(file, [{ ...placeIn(text, deep), where: '', what: TOO_DEEP[0], mend: TOO_DEEP[1] }]);
    // Keys that stand twice are found by Places: the parser's own search takes the square of their number.
    const document = parseDocument(text, { lineCounter: lines, strict: true, uniqueKeys: false, merge: false, prettyErrors: false, logLevel: 'error' });
    const read = new StandDocument(file, document, lines);
    const faults = read.faults();
    if (faults.length > 0) throw new StandFaults(file, faults);
    return read;
  }

  /** The plain value. Aliases are bounded: a few lines cannot become a million. @throws StandFaults */
  value(): unknown {
    if (this.plain !== undefined) return this.plain;
    try {
      return (this.plain = this.document.toJS({ maxAliasCount: MOST_ALIASES }) as unknown);
    } catch {
      throw new StandFaults(this.file, [{ line: 1, column: 1, where: '', what: UNFOLDS[0], mend: UNFOLDS[1] }]);
    }
  }

  /** Where the value at `path` stands; the nearest part above it where there is none. */
  place(path: Path): { line: number; column: number } {
    return this.position(this.places.ofValue(path));
  }

  /** Where the key `key` of the mapping at `path` stands. */
  placeOfKey(path: Path, key: PropertyKey): { line: number; column: number } {
    return this.position(this.places.ofKey([...path, key]));
  }

  private position(offset: number): { line: number; column: number } {
    const { line, col } = this.lines.linePos(offset);
    return { line: Math.max(1, line), column: Math.max(1, col) };
  }

  /** Faults of YAML in the order of the file, one a line. */
  private faults(): StandFault[] {
    const { errors, warnings, directives } = this.document;
    const at = (offset: number, [what, mend]: readonly [string, string], where = ''): StandFault => ({ ...this.position(offset), where, what, mend });
    const found = [...errors, ...warnings].map(({ code, pos }) => at(pos[0], SYNTAX[code] ?? NO_YAML));
    if (directives.yaml.explicit && directives.yaml.version !== '1.2') found.push(at(0, OLD_YAML));
    // What follows a fault of YAML is guesswork.
    if (found.length === 0) {
      for (const offset of this.places.strange.slice(0, MOST)) found.push(at(offset, STRANGE));
      for (const { offset, path } of this.places.twice.slice(0, MOST)) found.push(at(offset, TWICE, path.map(String).join('.')));
    }
    found.sort((a, b) => a.line - b.line || a.column - b.column);
    return found.filter(({ line }, i) => line !== found[i - 1]?.line).slice(0, MOST);
  }
}

function placeIn(text: string, offset: number): { line: number; column: number } {
  const before = text.slice(0, offset).split('\n');
  return { line: before.length, column: before.at(-1)!.length + 1 };
}
