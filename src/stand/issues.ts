import type { z } from 'zod';
import { clean } from '../text/clean.js';
import { nearest } from '../text/nearest.js';
import type { StandDocument } from './document.js';
import type { Path } from './places.js';
import type { StandFault } from './faults.js';
import { standSchema } from './schema.js';

type Issue = z.core.$ZodIssue;

const MOST = 1000; // issues that are looked at, and strange keys of one part: more than anyone reads

/** Turns what the schema found into faults with a place, a sentence and the mend. */
export function schemaFaults(document: StandDocument, issues: readonly Issue[]): StandFault[] {
  const faults = issues.slice(0, MOST).flatMap((issue) => faultsOf(document, issue, issue.path));
  // A key that is misspelt is also missing: one cause, told once.
  const meant = new Set(faults.filter(({ mend }) => mend?.startsWith('Did you mean')).map(({ where, mend }) => where.slice(0, where.lastIndexOf('.') + 1) + mend!.split("'")[1]!));
  return faults.filter(({ where, what }) => !(what.endsWith(' is missing.') && meant.has(where)));
}

function faultsOf(document: StandDocument, issue: Issue, path: Path): StandFault[] {
  const where = path.map(String).join('.');
  const shown = clean(where || 'the stand file', 120);
  if (issue.code === 'unrecognized_keys') {
    const known = keysAt(path);
    return issue.keys.slice(0, MOST).map((key) => {
      const near = nearest(key, known);
      return {
        ...document.placeOfKey(path, key),
        where: [where, key].filter(Boolean).join('.'),
        what: `There is no key '${clean(key, 60)}' ${where ? `in ${shown}` : 'at the top of a stand file'}.`,
        mend: near === key ? 'It does not go with the other keys here: give one of them.' : key === '<<' ? 'Mappings are not merged: write its keys out, or take a whole part over by *name.' : near ? `Did you mean '${near}'?` : known.length > 0 ? `It may have: ${known.join(', ')}.` : null,
      };
    });
  }
  if (issue.code === 'invalid_union') {
    // The branch that got furthest knows best what was meant.
    const inner = issue.errors.map((branch) => branch.filter(({ code, path: p }) => p.length > 0 || code === 'unrecognized_keys')).find((branch) => branch.length > 0);
    if (inner) return inner.flatMap((deeper) => faultsOf(document, deeper, [...path, ...deeper.path]));
  }
  if (issue.code === 'invalid_key') {
    const key = path.at(-1)!;
    const reason = issue.issues[0]?.message ?? 'will not do';
    return [{ ...document.placeOfKey(path.slice(0, -1), key), where, what: `The name '${clean(String(key), 60)}' ${reason}.`, mend: null }];
  }
  if (path.length === 0) return [{ line: 1, column: 1, where, what: 'The file holds no keys.', mend: "A stand file begins with 'stand: ' and its name; config/ holds examples." }];
  const missing = issue.code === 'invalid_type' && issue.input === undefined && !isGiven(document, path);
  if (missing)
    return [{ ...document.place(path.slice(0, -1)), where, what: `${shown} is missing.`, mend: MEND[String(path.at(-1))] ?? null }];
  if (issue.code === 'invalid_value' && issue.values.length > 1 && typeof readAt(document, path) === 'string') {
    const given = String(readAt(document, path));
    const near = nearest(given, issue.values.map(String));
    return [
      {
        ...document.place(path),
        where,
        what: `${shown}: '${clean(given, 60)}' ${issue.message}.`,
        mend: near ? `Did you mean '${near}'?` : `It may be: ${issue.values.map(String).join(', ')}.`,
      },
    ];
  }
  if (issue.code === 'invalid_type' && issue.expected === 'object')
    return [{ ...document.place(path), where, what: `${shown} must hold keys of its own, not a single value.`, mend: `It may have: ${keysAt(path).join(', ')}.` }];
  const secret = SECRETS.has(String(path.at(-1)));
  return [{ ...document.place(path), where, what: `${shown} ${issue.message}.`, mend: secret ? 'Put it into a variable or a file.' : null }];
}

const SECRETS: ReadonlySet<string> = new Set(['user', 'password']);

const MEND: Readonly<Record<string, string>> = {
  stand: "Give the stand a name: 'stand: Coolant pump cell'.",
  sources: 'Name at least one source: a serial line, a broker, a recording.',
  channels: 'Name at least one channel.',
  from: "Say which source the channel comes from: 'from: logger/flow'.",
  centre: "A band is given as {centre, sigma}; or write 'learn 500'.",
  sigma: "A band is given as {centre, sigma}; or write 'learn 500'.",
};

function readAt(document: StandDocument, path: Path): unknown {
  let value = document.value();
  for (const key of path) value = (value as Record<PropertyKey, unknown> | null | undefined)?.[key];
  return value;
}

const isGiven = (document: StandDocument, path: Path): boolean => readAt(document, path) !== undefined;

/** The keys that the schema knows at a path. */
function keysAt(path: Path): string[] {
  let shapes: z.core.$ZodType[] = [standSchema];
  for (const key of path) shapes = shapes.flatMap((shape) => unwrap(shape)).flatMap((shape) => childOf(shape, String(key)));
  return shapes.flatMap((shape) => unwrap(shape)).flatMap((shape) => ('shape' in shape._zod.def ? Object.keys(shape._zod.def.shape as object) : []));
}

function unwrap(shape: z.core.$ZodType): z.core.$ZodType[] {
  const def = shape._zod.def as { innerType?: z.core.$ZodType; options?: z.core.$ZodType[] };
  if (def.innerType) return unwrap(def.innerType);
  if (def.options) return def.options.flatMap((option) => unwrap(option));
  return [shape];
}

function childOf(shape: z.core.$ZodType, key: string): z.core.$ZodType[] {
  const def = shape._zod.def as { shape?: Record<string, z.core.$ZodType>; valueType?: z.core.$ZodType };
  const child = def.shape?.[key] ?? def.valueType;
  return child ? [child] : [];
}
