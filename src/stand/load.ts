import { createHash } from 'node:crypto';
import { hostname } from 'node:os';
import { dirname, isAbsolute, join, parse, resolve } from 'node:path';
import type { LineOptions } from '../../adapters/options.js';
import type { BandSource } from '../engine/spec.js';
import { ZONE_RULES } from '../engine/rules.js';
import { crossFaults, partFaults } from './crossCheck.js';
import { StandDocument } from './document.js';
import { StandFaults, type StandFault } from './faults.js';
import { schemaFaults } from './issues.js';
import { rightParts } from './partial.js';
import { learnCount, parseDuration, parseRate, parseSize, splitOnce } from './quantities.js';
import { standSchema, type ChannelEntry, type SourceEntry, type StandFile } from './schema.js';
import type { ChannelConfig, SourceConfig, Stand } from './types.js';

/**
 * Reads a stand file.
 * @param file its path; paths in it are relative to its folder
 * @throws UserError where the file cannot be read
 * @throws StandFaults with all faults that were found, each with line and column
 */
export function loadStand(file: string): Stand {
  const document = StandDocument.read(file);
  const parsed = standSchema.safeParse(document.value(), { reportInput: true });
  if (!parsed.success) throw new StandFaults(file, inOrder(schemaFaults(document, parsed.error.issues).concat(partFaults(document, rightParts(document.value())))));
  const faults = crossFaults(document, parsed.data);
  if (faults.length > 0) throw new StandFaults(file, inOrder(faults));
  return convert(file, parsed.data);
}

const MOST = 200; // faults that are told

/** In the order of the file, each once; of very many the first, and how many more there are. */
function inOrder(faults: StandFault[]): StandFault[] {
  const seen = new Set<string>();
  const found = faults
    .sort((a, b) => a.line - b.line || a.column - b.column)
    .filter(({ line, column, what }) => {
      const key = `${line}:${column}:${what}`;
      return !seen.has(key) && seen.add(key);
    });
  if (found.length <= MOST) return found;
  const { line, column } = found[MOST]!;
  return [...found.slice(0, MOST), { line, column, where: '', what: `From here on there are ${found.length - MOST} faults more.`, mend: 'Mend those above first.' }];
}

function convert(file: string, { stand, watch, log, sources, channels }: StandFile): Stand {
  const folder = dirname(resolve(file));
  const path = (name: string): string => (isAbsolute(name) ? name : join(folder, name));
  return {
    file: resolve(file),
    name: stand,
    limits: watch.limits,
    budget: parseRate(watch.falseAlarms),
    sources: Object.entries(sources).map(([name, entry]) => sourceConfig(name, entry, path, resolve(file))),
    channels: Object.entries(channels).map(([name, entry]) => channelConfig(name, entry, watch)),
    log: {
      file: log.file === undefined ? join(folder, `${parse(file).name}.alarms.jsonl`) : path(log.file),
      maxBytes: parseSize(log.maxSize)!,
    },
  };
}

function lineOptions({ lines, columns, maxLine }: SourceEntry): LineOptions {
  return { lines: lines ?? (columns ? 'csv' : 'number'), columns: columns ?? null, maxLine: maxLine ?? 256 };
}

function sourceConfig(name: string, entry: SourceEntry, path: (name: string) => string, file: string): SourceConfig {
  if (entry.serial !== undefined) {
    const port = typeof entry.serial === 'string' ? { path: entry.serial, baudRate: 9600, dataBits: 8 as const, parity: 'none' as const, stopBits: 1 as const } : entry.serial;
    return { name, kind: 'serial', options: { ...port, ...lineOptions(entry), retryFrom: 250, retryTo: 10_000 } };
  }
  if (entry.mqtt !== undefined) {
    const secret = (given: SourceEntry['user']) => (given === undefined ? null : 'env' in given ? given : { file: path(given.file) });
    const pem = (given: string | undefined) => (given === undefined ? null : path(given));
    return {
      name,
      kind: 'mqtt',
      options: {
        url: entry.mqtt,
        protocol: entry.protocol ?? '3.1.1',
        clientId: entry.clientId ?? defaultClientId(file, name),
        keepalive: parseDuration(entry.keepalive ?? '15 s')!,
        qos: entry.qos ?? 1,
        ca: pem(entry.ca),
        cert: pem(entry.cert),
        key: pem(entry.key),
        user: secret(entry.user),
        password: secret(entry.password),
        maxPayload: parseSize(entry.maxPayload ?? '64 kB')!,
        retryFrom: 500,
        retryTo: 15_000,
      },
    };
  }
  if (entry.recording !== undefined) return { name, kind: 'recording', options: { path: path(entry.recording) } };
  if (entry.stdin !== undefined) return { name, kind: 'stdin', options: lineOptions(entry) };
  const { simulated } = entry;
  return {
    name,
    kind: 'simulated',
    options: simulated === undefined || typeof simulated === 'string' ? { seed: 1, faults: true, speed: 1 } : simulated,
  };
}

/** Fixed for one stand file on one machine, so that the broker keeps its session over restarts, and used by no other. */
function defaultClientId(file: string, source: string): string {
  return `kilter-${createHash('sha256').update(`${hostname()}\n${file}\n${source}`).digest('hex').slice(0, 16)}`; // at most 23 characters
}

function channelConfig(name: string, entry: ChannelEntry, watch: StandFile['watch']): ChannelConfig {
  const [source, field] = splitOnce(entry.from);
  const every = entry.every === undefined ? null : parseDuration(entry.every);
  const silentAfter = entry.silentAfter === undefined ? (every === null ? null : Math.max(5 * every, 2000)) : parseDuration(entry.silentAfter);
  return {
    origin: {
      source,
      field,
      topic: entry.topic ?? null,
      value: entry.value ?? null,
      time: entry.time ?? null,
      sequence: entry.sequence ?? null,
    },
    spec: {
      channel: name,
      unit: entry.unit,
      every,
      silentAfter,
      range: entry.range ?? null,
      tolerance: entry.tolerance ?? null,
      resolution: entry.resolution ?? null,
      band: bandSource(entry.band),
      rules: entry.rules ?? watch.rules ?? ZONE_RULES,
      k: entry.k ?? watch.k ?? 3,
      sideRun: entry.sideRun,
      frozen: entry.frozen,
      frozenOdds: entry.frozenOdds,
      window: entry.window ?? watch.window ?? 500,
      clearAfter: entry.clearAfter ?? watch.clearAfter ?? 10,
    },
  };
}

function bandSource(band: ChannelEntry['band']): BandSource {
  if (typeof band === 'string') return { learn: learnCount(band)! };
  return band.n === undefined ? { centre: band.centre, sigma: band.sigma } : { centre: band.centre, sigma: band.sigma, n: band.n };
}
