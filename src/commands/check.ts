import { formatDuration, formatValue } from '../engine/format.js';
import type { ChannelSpec } from '../engine/spec.js';
import { NO_BUDGET } from '../stand/budget.js';
import { faultLine, StandFaults, type StandFault } from '../stand/faults.js';
import { loadStand } from '../stand/load.js';
import { notes } from '../stand/notes.js';
import { price, priceWords, watchPrice } from '../stand/price.js';
import type { ChannelConfig, Stand } from '../stand/types.js';
import { ANSWER_IS_NO, FINE, parse, say, sayJson, verb } from './cli.js';

/** `kilter check STAND`: says what is wrong with a stand file and how to mend it; else what is watched and what that costs. */
export async function run(args: readonly string[]): Promise<number> {
  const command = verb('check', 'Reads a stand file and says what is wrong and how to mend it, with line and column; prints the watch on each channel and what it costs.')
    .argument('<stand>', 'the stand file')
    .option('--json', 'one JSON object instead of text');
  const done = parse(command, args);
  if (done !== null) return done;
  const { json } = command.opts<{ json?: boolean }>();
  const file = command.args[0]!;
  let stand: Stand;
  try {
    stand = loadStand(file);
  } catch (error) {
    if (!(error instanceof StandFaults)) throw error;
    if (json) sayJson({ ok: false, faults: error.faults, notes: [], channels: [] });
    else sayFaults(file, error.faults);
    return Promise.resolve(ANSWER_IS_NO);
  }
  const budgeted = stand.limits === 'budget';
  if (json)
    sayJson({
      ok: !budgeted,
      faults: budgeted ? [{ line: null, column: null, where: 'watch.limits', what: NO_BUDGET[0], mend: NO_BUDGET[1] }] : [],
      notes: notes(stand),
      falseAlarmEvery: budgeted ? null : watchPrice(stand),
      channels: stand.channels.map(facts),
    });
  else describe(stand);
  return budgeted ? ANSWER_IS_NO : FINE;
}

function sayFaults(file: string, faults: readonly StandFault[]): void {
  for (const fault of faults) say(faultLine(file, fault));
  say(`${faults.length} ${faults.length === 1 ? 'fault' : 'faults'}.`);
}

function describe(stand: Stand): void {
  say(`${stand.name}: ${count(stand.channels.length, 'channel')} from ${count(stand.sources.length, 'source')}.`);
  say();
  for (const channel of stand.channels) {
    const { spec, origin } = channel;
    say(`${spec.channel}${spec.unit && ` [${spec.unit}]`}`);
    say(`  from     ${[origin.source, origin.field ?? origin.topic, origin.value].filter(Boolean).join(' ')}${spec.every === null ? '' : `, every ${formatDuration(spec.every)}`}`);
    say(`  band     ${bandWords(spec)}`);
    say(`  rules    ${spec.rules.join(', ') || 'none'}`);
    if (stand.limits === 'textbook') say(`  price    ${priceWords(spec)}`);
    say(`  also     ${alsoWatched(spec)}`);
    say(`  clears   after ${count(spec.clearAfter, 'reading')} back in the band`);
  }
  const said = notes(stand);
  if (said.length > 0) {
    say();
    for (const note of said) say(`note: ${note}`);
  }
  say();
  say(`The alarm log will be ${stand.log.file}`);
  const words = watchPrice(stand);
  if (words) say(`${words[0]!.toUpperCase()}${words.slice(1)}.`);
  if (stand.limits === 'budget') say(NO_BUDGET.join(' '));
}

function bandWords({ band, k, every, resolution, unit }: ChannelSpec): string {
  if ('learn' in band) {
    const takes = every === null ? '' : ` (${formatDuration(band.learn * every)})`;
    return `learned from the first ${band.learn} readings${takes}, limits at ${k} sigma`;
  }
  const value = (x: number): string => formatValue(x, band.sigma, resolution);
  const u = unit && ` ${unit}`;
  return `given: centre ${value(band.centre)}${u}, sigma ${band.sigma}${u}, limits ${value(band.centre - k * band.sigma)} to ${value(band.centre + k * band.sigma)}${u} (${k} sigma)`;
}

function alsoWatched({ silentAfter, range, tolerance, frozen }: ChannelSpec): string {
  return [
    silentAfter === null ? null : `silence of ${formatDuration(silentAfter)}`,
    range === null ? 'not a number' : `off the scale ${range[0]} to ${range[1]}`,
    tolerance === null ? null : `outside tolerance ${tolerance[0]} to ${tolerance[1]}`,
    frozen ? 'a frozen value' : null,
  ]
    .filter((part) => part !== null)
    .join(', ');
}

function facts({ spec, origin }: ChannelConfig): object {
  const { band, k } = spec;
  const cost = price(spec);
  return {
    channel: spec.channel,
    unit: spec.unit,
    origin,
    every: spec.every,
    band: 'learn' in band ? band : { ...band, low: band.centre - k * band.sigma, high: band.centre + k * band.sigma },
    k,
    rules: spec.rules,
    silentAfter: spec.silentAfter,
    range: spec.range,
    tolerance: spec.tolerance,
    frozen: spec.frozen,
    clearAfter: spec.clearAfter,
    falseAlarm: cost && { readings: cost.readings, ms: cost.time, without: cost.without },
  };
}

const count = (n: number, what: string): string => `${n} ${what}${n === 1 ? '' : 's'}`;
