import { isMap, isScalar, isSeq, type Pair } from 'yaml';


export type Path = readonly PropertyKey[];

const DEEPEST = 8; // a stand file says nothing below

/** Where the parts of a YAML document begin, as offsets. Built in one pass, so many faults cost no more than the file's length. */
export class Places {
  private readonly values = new Map<string, number>();
  private readonly keys = new Map<string, number>();
  /** Keys that stand twice in one mapping. */
  readonly twice: { readonly path: Path; readonly offset: number }[] = [];
  /** Keys that are no names: lists, mappings, nothing, and the one word that would vanish from an object. */
  readonly strange: number[] = [];

  constructor(top: unknown) {
    this.walk(top, []);
  }

  /** The value at `path`, or the nearest part above it. */
  ofValue(path: Path): number {
    for (let length = path.length; length > 0; length--) {
      const offset = this.values.get(wayTo(path.slice(0, length)));
      if (offset !== undefined) return offset;
    }
    return 0;
  }

  /** The key at `path`; the value above it where there is none. */
  ofKey(path: Path): number {
    return this.keys.get(wayTo(path)) ?? this.ofValue(path.slice(0, -1));
  }

  private walk(node: unknown, path: Path): void {
    const offset = offsetOf(node);
    if (offset !== null) this.values.set(wayTo(path), offset);
    if (path.length >= DEEPEST) return;
    if (isSeq(node)) node.items.forEach((item, i) => this.walk(item, [...path, i]));
    else if (isMap(node)) for (const pair of node.items) this.walkPair(pair, path, offset ?? 0);
  }

  private walkPair({ key, value }: Pair, path: Path, above: number): void {
    const offset = offsetOf(key) ?? above;
    const name: unknown = isScalar(key) ? key.value : null;
    if ((typeof name !== 'string' && typeof name !== 'number' && typeof name !== 'boolean') || name === '__proto__') {
      this.strange.push(offset);
      return;
    }
    const at = [...path, String(name)];
    if (this.keys.has(wayTo(at))) this.twice.push({ path: at, offset });
    else {
      this.keys.set(wayTo(at), offset);
      this.walk(value, at);
    }
  }
}

const wayTo = (path: Path): string => path.map(String).join('\u0000');

function offsetOf(node: unknown): number | null {
  const range = (node as { range?: readonly number[] | null } | null)?.range;
  return range?.[0] ?? null;
}
