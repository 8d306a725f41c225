import type { z } from 'zod';
import { channelSchema, sourceSchema, type StandFile } from './schema.js';

/** The parts of a faulty stand file that are right by themselves, so that they can be held against each other all the same. */
export interface PartialStand {
  readonly sources: StandFile['sources'];
  readonly channels: StandFile['channels'];
  /** Names of sources which have faults of their own. */
  readonly broken: ReadonlySet<string>;
}

export function rightParts(value: unknown): PartialStand {
  const [sources, broken] = rightEntries(sourceSchema, value, 'sources');
  const [channels] = rightEntries(channelSchema, value, 'channels');
  return { sources, channels, broken };
}

function rightEntries<S extends z.ZodType>(schema: S, value: unknown, key: string): [right: Record<string, z.output<S>>, broken: Set<string>] {
  const right: Record<string, z.output<S>> = {};
  const broken = new Set<string>();
  const entries = isObject(value) && isObject(value[key]) ? value[key] : {};
  for (const [name, entry] of Object.entries(entries)) {
    const parsed = schema.safeParse(entry);
    if (parsed.success) right[name] = parsed.data;
    else broken.add(name);
  }
  return [right, broken];
}

const isObject = (value: unknown): value is Record<string, unknown> => typeof value === 'object' && value !== null && !Array.isArray(value);
