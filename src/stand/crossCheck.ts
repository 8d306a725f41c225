import { parsePointer } from '../../adapters/decoding/pointer.js';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import { nearest } from '../text/nearest.js';
import type { Path, StandDocument } from './document.js';
import type { StandFault } from './faults.js';
import { learnCount, parseDuration, splitOnce } from './quantities.js';
import { KINDS, type ChannelEntry, type SourceEntry, type StandFile } from './schema.js';
import { topicFault } from './topic.js';

const FEWEST = 20; // readings below which a learned sigma is uncertain by more than 16 %

/** What only shows when parts of a stand file are held against each other. */
export function crossFaults(document: StandDocument, file: StandFile): StandFault[] {
  const faults: StandFault[] = [];
  const fault = (path: Path, what: string, mend: string | null = null): void => {
    faults.push({ ...document.place(path), where: path.map(String).join('.'), what, mend });
  };
  if (Object.keys(file.sources).length === 0) fault(['sources'], 'The stand has no source.', 'Name at least one: a serial line, a broker, a recording.');
  if (Object.keys(file.channels).length === 0) fault(['channels'], 'The stand has no channel.', 'Name at least one.');
  for (const [name, source] of Object.entries(file.sources)) sourceFaults(['sources', name], source, fault);
  const stdins = Object.entries(file.sources).filter(([, { stdin }]) => stdin === true);
  for (const [name] of stdins.slice(1)) fault(['sources', name], 'Standard input can be the source of a stand only once.', 'Read several fields from one source instead.');
  for (const [name, channel] of Object.entries(file.channels)) channelFaults(['channels', name], channel, file, fault);
  return faults;
}

type Report = (path: Path, what: string, mend?: string | null) => void;

/** Keys of a source that only some kinds take. */
const ONLY: Readonly<Record<string, readonly (typeof KINDS)[number][]>> = {
  lines: ['serial', 'stdin'],
  columns: ['serial', 'stdin'],
  maxLine: ['serial', 'stdin'],
  ...Object.fromEntries(['protocol', 'clientId', 'keepalive', 'qos', 'ca', 'cert', 'key', 'user', 'password', 'maxPayload'].map((key) => [key, ['mqtt']])),
};

function sourceFaults(path: Path, source: SourceEntry, fault: Report): void {
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
  if ((source.cert === undefined) !== (source.key === undefined)) fault(path, `${name} has only one of cert and key.`, 'Give both, or neither.');
}

function addressFaults(path: Path, address: string, fault: Report): void {
  let url: URL;
  try {
    url = new URL(address);
  } catch {
    fault(path, `'${clean(address, 80)}' is no address.`, 'Write mqtt://host:1883 or mqtts://host:8883.');
    return;
  }
  if (url.protocol !== 'mqtt:' && url.protocol !== 'mqtts:')
    fault(path, `'${clean(url.protocol, 20)}' is no way to reach a broker.`, 'Write mqtt://host:1883 or mqtts://host:8883.');
  else if (url.hostname === '') fault(path, 'The address names no host.', 'Write mqtt://host:1883.');
  if (url.username !== '' || url.password !== '')
    fault(path, 'A user name or password stands in the address.', "Take it out; write 'user: {env: NAME}' and 'password: {file: PATH}'.");
}

function channelFaults(path: Path, channel: ChannelEntry, file: StandFile, fault: Report): void {
  const [sourceName, field] = splitOnce(channel.from);
  const source = Object.hasOwn(file.sources, sourceName) ? file.sources[sourceName] : undefined;
  if (!source) {
    const names = Object.keys(file.sources);
    const near = nearest(sourceName, names);
    fault([...path, 'from'], `There is no source '${clean(sourceName, 60)}'.`, near ? `Did you mean '${near}'?` : names.length > 0 ? `There are: ${clean(names.join(', '), 200)}.` : null);
  } else originFaults(path, channel, source, field, fault);
  for (const key of ['value', 'time', 'sequence'] as const) pointerFault([...path, key], channel[key], fault);
  bandFaults(path, channel, fault);
  const { rules } = channel;
  for (const [i, rule] of (rules ?? []).entries()) if (rules!.indexOf(rule) !== i) fault([...path, 'rules', i], `The rule ${rule} stands twice.`, 'Take one out.');
  const { every, silentAfter } = channel;
  if (every !== undefined && silentAfter !== undefined && parseDuration(silentAfter)! <= parseDuration(every)!)
    fault([...path, 'silentAfter'], `Silence would be called after ${silentAfter}, but a reading is due only every ${every}.`, 'Give it several intervals.');
}

function originFaults(path: Path, channel: ChannelEntry, source: SourceEntry, field: string | null, fault: Report): void {
  if (source.mqtt !== undefined) {
    if (channel.topic === undefined) fault(path, 'A channel from a broker needs a topic.', "Write 'topic: cell3/bearing/temperature'.");
    else {
      const wrong = topicFault(channel.topic);
      if (wrong) fault([...path, 'topic'], `The topic ${wrong}.`, "'+' stands for one level, '#' for all that follow.");
    }
    if (field !== null) fault([...path, 'from'], 'A channel from a broker has a topic, no field.', "Write 'from: <source>' and give the topic below it.");
    return;
  }
  if (channel.topic !== undefined) fault([...path, 'topic'], 'Only a broker has topics.', 'Take it out.');
  const json = source.lines === 'json' && (source.serial !== undefined || source.stdin !== undefined);
  if (!json)
    for (const key of ['value', 'time', 'sequence'] as const)
      if (channel[key] !== undefined) fault([...path, key], `A JSON Pointer needs JSON to point into, but the source gives none.`, "Take it out, or write 'lines: json'.");
  const { columns } = source;
  if (columns && !columns.includes(field ?? '')) {
    const near = field === null ? null : nearest(field, columns);
    fault(
      [...path, 'from'],
      field === null ? 'The channel does not say which column it is.' : `The source has no column '${clean(field, 60)}'.`,
      near ? `Did you mean '${near}'?` : `Its columns are: ${clean(columns.filter((column) => column !== '-').join(', '), 200)}.`,
    );
  }
}

function pointerFault(path: Path, pointer: string | undefined, fault: Report): void {
  if (pointer === undefined) return;
  try {
    parsePointer(pointer);
  } catch (error) {
    if (!(error instanceof UserError)) throw error;
    fault(path, error.what, error.mend ?? null);
  }
}

function bandFaults(path: Path, { band }: ChannelEntry, fault: Report): void {
  if (typeof band !== 'string') return;
  const count = learnCount(band);
  if (count === null) {
    const learnish = /^learn\b/.test(band.trim());
    fault(
      [...path, 'band'],
      learnish ? `'${clean(band, 60)}' does not say how many readings.` : `There is no accepted band '${clean(band, 60)}': accepted bands are not part of this version.`,
      "Write {centre: 41.2, sigma: 0.31}, or 'learn 500'.",
    );
  } else if (count < FEWEST) fault([...path, 'band'], `A band learned from ${count} readings is worth little: its sigma would be uncertain by more than 16 %.`, `Learn from at least ${FEWEST}; 500 is better.`);
}
