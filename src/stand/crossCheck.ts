import { topicFault } from '../../adapters/mqtt/topicFault.js';
import { dirname, resolve } from 'node:path';
import { parsePointer } from '../../adapters/decoding/pointer.js';
import { INSTRUMENTS, instrumentAt } from '../../adapters/simulated/cell.js';
import { clean } from '../text/clean.js';
import { nearest } from '../text/nearest.js';
import type { StandDocument } from './document.js';
import type { PartialStand } from './partial.js';
import type { Path } from './places.js';
import type { StandFault } from './faults.js';
import { learnCount, parseDuration, splitOnce } from './quantities.js';
import type { ChannelEntry, SourceEntry, StandFile } from './schema.js';
import { clashes, sourceFaults, userFault, type Report } from './sourceCheck.js';

const MOST = 1_000_000; // readings to learn from: more than a day at ten a second
const FEWEST = 20; // readings below which a learned sigma is uncertain by more than 16 %

/** What only shows when parts of a stand file are held against each other. */
export function crossFaults(document: StandDocument, file: StandFile): StandFault[] {
  const faults: StandFault[] = [];
  const fault = reporter(document, faults);
  if (Object.keys(file.sources).length === 0) fault(['sources'], 'The stand has no source.', 'Name at least one: a serial line, a broker, a recording.');
  if (Object.keys(file.channels).length === 0) fault(['channels'], 'The stand has no channel.', 'Name at least one.');
  repeatedRules(['watch', 'rules'], file.watch.rules, fault);
  logFault(document.file, file, fault);
  return faults.concat(partFaults(document, { sources: file.sources, channels: file.channels, broken: new Set() }));
}

/** The same of sources and channels alone, which may be the right ones of a faulty file. */
export function partFaults(document: StandDocument, parts: PartialStand): StandFault[] {
  const faults: StandFault[] = [];
  const fault = reporter(document, faults);
  for (const [name, source] of Object.entries(parts.sources)) sourceFaults(['sources', name], source, fault);
  clashes(parts.sources, fault);
  for (const [name, channel] of Object.entries(parts.channels)) channelFaults(['channels', name], channel, parts, fault);
  return faults;
}

function reporter(document: StandDocument, faults: StandFault[]): Report {
  return (path, what, mend = null) => {
    faults.push({ ...document.place(path), where: path.map(String).join('.'), what, mend });
  };
}

function channelFaults(path: Path, channel: ChannelEntry, { sources, broken }: PartialStand, fault: Report): void {
  const [sourceName, field] = splitOnce(channel.from);
  const source = Object.hasOwn(sources, sourceName) ? sources[sourceName] : undefined;
  if (source) originFaults(path, channel, source, field, fault);
  else if (!broken.has(sourceName)) {
    const names = [...Object.keys(sources), ...broken];
    const near = nearest(sourceName, names);
    fault([...path, 'from'], `There is no source '${clean(sourceName, 60)}'.`, near ? `Did you mean '${clean(near, 80)}'?` : names.length > 0 ? `There are: ${clean(names.join(', '), 200)}.` : null);
  }
  for (const key of ['value', 'time', 'sequence'] as const) pointerFault([...path, key], channel[key], fault);
  bandFaults(path, channel, fault);
  repeatedRules([...path, 'rules'], channel.rules, fault);
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
  fieldFault(path, source, field, String(path[1]), fault);
}

function fieldFault(path: Path, source: SourceEntry, field: string | null, channel: string, fault: Report): void {
  const at = [...path, 'from'];
  if (source.simulated !== undefined) {
    const asked = field ?? channel;
    const has = INSTRUMENTS.map((instrument) => instrument.channel);
    const near = nearest(asked, has);
    if (instrumentAt(asked) < 0) fault(at, `The simulated cell has no instrument '${clean(asked, 60)}'.`, near ? `Did you mean '${near}'?` : `It has: ${has.join(', ')}.`);
  }
  if (source.serial === undefined && source.stdin === undefined) return;
  const named = source.columns?.filter((column) => column !== '-');
  if (named) {
    if (field === null ? named.length === 1 : named.includes(field)) return;
    const near = field === null ? null : nearest(field, named);
    fault(
      at,
      field === null ? 'The channel does not say which column it is.' : `The source has no column '${clean(field, 60)}'.`,
      near ? `Did you mean '${near}'?` : `Its columns are: ${clean(named.join(', '), 200)}.`,
    );
  } else if (source.lines === 'pairs' && !field) fault(at, "The channel does not say which of the line's pairs it is.", "Write its name after the source: 'from: logger/T'.");
  else if ((source.lines ?? 'number') === 'number' && field !== null)
    fault(at, `Each line of this source is one number, so it has no field '${clean(field, 60)}'.`, "Take the field out, or write 'columns: [flow, inlet]' at the source.");
}

function repeatedRules(path: Path, rules: readonly string[] | undefined, fault: Report): void {
  for (const [i, rule] of (rules ?? []).entries()) if (rules!.indexOf(rule) !== i) fault([...path, i], `The rule ${rule} stands twice.`, 'Take one out.');
}

/** An alarm log must not be written into a file that is read. */
function logFault(standFile: string, { log, sources }: StandFile, fault: Report): void {
  if (log.file === undefined) return;
  const path = (file: string): string => resolve(dirname(resolve(standFile)), file);
  const into = path(log.file);
  const read = Object.values(sources).flatMap(({ recording }) => (recording === undefined ? [] : [path(recording)]));
  if (into === resolve(standFile)) fault(['log', 'file'], 'The alarm log would be written into the stand file.', 'Give it a file of its own.');
  else if (read.includes(into)) fault(['log', 'file'], 'The alarm log would be written into a recording that the stand reads.', 'Give it a file of its own.');
  else if (/[/\\]$/.test(log.file)) fault(['log', 'file'], 'The alarm log is a file, but a folder is named.', "Write 'file: alarms/stand.jsonl'.");
}

function pointerFault(path: Path, pointer: string | undefined, fault: Report): void {
  if (pointer === undefined) return;
  try {
    parsePointer(pointer);
  } catch (error) {
    userFault(path, error, fault);
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
  else if (count > MOST) fault([...path, 'band'], `A band learned from ${count} readings would take too long.`, `Learn from at most ${MOST}; 500 to 5000 do.`);
}
