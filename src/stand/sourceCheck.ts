import { brokerAddress } from '../../adapters/mqtt/address.js';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import type { Path } from './places.js';
import { KINDS, type SourceEntry, type StandFile } from './schema.js';

/** Takes a fault of the part at `path`. */
export type Report = (path: Path, what: string, mend?: string | null) => void;

/** Keys of a source that only some kinds take. */
const ONLY: Readonly<Record<string, readonly (typeof KINDS)[number][]>> = {
  lines: ['serial', 'stdin'],
  columns: ['serial', 'stdin'],
  maxLine: ['serial', 'stdin'],
  ...Object.fromEntries(['protocol', 'clientId', 'keepalive', 'qos', 'ca', 'cert', 'key', 'user', 'password', 'maxPayload'].map((key) => [key, ['mqtt']])),
};

/** What is wrong with one source by itself. */
export function sourceFaults(path: Path, source: SourceEntry, fault: Report): void {
  const name = clean(String(path[1]), 60);
  const kinds = KINDS.filter((kind) => source[kind] !== undefined);
  if (kinds.length !== 1) {
    fault(
      path,
      kinds.length === 0 ? `Nothing says what kind of source ${name} is.` : `${name} says twice what kind of source it is: ${kinds.join(' and ')}.`,
      `A source has exactly one of: ${KINDS.join(', ')}.`,
    );
    return;
  }
  const [kind] = kinds;
  for (const [key, may] of Object.entries(ONLY))
    if (source[key as keyof SourceEntry] !== undefined && !may.includes(kind!)) fault([...path, key], `A ${kind} source takes no '${key}'.`, `It goes with: ${may.join(', ')}.`);
  if (source.columns) {
    if (source.lines !== undefined && source.lines !== 'csv') fault([...path, 'columns'], `Lines of ${source.lines} have no columns.`, "Write 'lines: csv', or take columns out.");
    const named = source.columns.filter((column) => column !== '-');
    for (const [i, column] of source.columns.entries())
      if (column !== '-' && source.columns.indexOf(column) !== i) fault([...path, 'columns', i], `The column '${clean(column, 60)}' stands twice.`, "Name each once; '-' skips one.");
    if (named.length === 0) fault([...path, 'columns'], 'All columns are skipped.', 'Name at least one.');
  } else if (source.lines === 'csv') fault([...path, 'lines'], 'Lines of csv need the names of their columns.', "Write 'columns: [flow, inlet]'.");
  if (source.mqtt !== undefined) addressFaults([...path, 'mqtt'], source.mqtt, fault);
  if (source.password !== undefined && source.user === undefined) fault([...path, 'password'], 'There is a password, but no user name.', 'MQTT sends a password only with a user name: give both.');
  if (source.mqtt?.startsWith('mqtt:'))
    for (const key of ['ca', 'cert', 'key'] as const) if (source[key] !== undefined) fault([...path, key], `'${key}' is for an encrypted connection, but the address says mqtt://.`, 'Write mqtts://host:8883.');
  if ((source.cert === undefined) !== (source.key === undefined)) fault(path, `${name} has only one of cert and key.`, 'Give both, or neither.');
}

function addressFaults(path: Path, address: string, fault: Report): void {
  try {
    brokerAddress(address);
  } catch (error) {
    userFault(path, error, fault);
  }
}

/** Tells the fault that an error stands for. */
export function userFault(path: Path, error: unknown, fault: Report): void {
  if (!(error instanceof UserError)) throw error;
  fault(path, error.what, error.mend ?? null);
}

/** Sources that would get in each other's way. */
export function clashes(sources: StandFile['sources'], fault: Report): void {
  const taken = new Map<string, string>();
  for (const [name, source] of Object.entries(sources)) {
    const port = typeof source.serial === 'string' ? source.serial : source.serial?.path;
    const claims: [key: string | null, where: Path, what: string, mend: string][] = [
      [source.stdin === true ? 'stdin' : null, [], 'Standard input can be the source of a stand only once.', 'Read several fields from one source instead.'],
      [port === undefined ? null : `port ${port}`, ['serial'], 'This port is read by another source already.', 'Read several fields from one source instead.'],
      [
        source.clientId === undefined ? null : `client ${source.mqtt} ${source.clientId}`,
        ['clientId'],
        'Another source has this client identifier: the broker would drop the one whenever the other comes.',
        'Give each its own, or none.',
      ],
    ];
    for (const [key, where, what, mend] of claims) {
      if (key === null) continue;
      if (taken.has(key)) fault(['sources', name, ...where], what, mend);
      else taken.set(key, name);
    }
  }
}
