import { z } from 'zod';
import { RULES, ZONE_RULES } from '../engine/rules.js';
import { DURATION, parseDuration, parseRate, parseSize, RATE, SIZE } from './quantities.js';

/**
 * The stand file, typed once: the loader, the messages, the defaults and config/stand.schema.json are all made from here.
 */

/** No control characters, and none that are not seen or turn the direction of what follows. */
const VISIBLE = /^[^\u0000-\u001f\u007f-\u009f\u00ad\u061c\u180e\u200b-\u200f\u2028-\u202e\u2060-\u206f\ufeff\ufff9-\ufffb]*$/;

const words = (most: number) =>
  z
    .string({ error: 'must be text' })
    .min(1, { error: 'is empty' })
    .max(most, { error: `is longer than ${most} characters` })
    .regex(VISIBLE, { error: 'holds control characters' });

const name = words(80).regex(/^[^/\s]+$/, { error: "may hold no blanks and no '/'" });

const number = z.number({ error: 'must be a number' });
const positive = number.gt(0, { error: 'must be greater than 0' });
const whole = z.int({ error: 'must be a whole number' });

const within =
  (parse: (text: string) => number | null, least: number, most: number) =>
  (text: string): boolean => {
    const value = parse(text);
    return value !== null && value >= least && value <= most;
  };

const duration = (least: number, most: number, bounds: string) =>
  z
    .string({ error: "must be a time with its unit, such as '100 ms' or '2 s'" })
    .regex(DURATION, { error: "must be a time with its unit: '100 ms', '2 s', '5 min', '1 h' or '1 d'" })
    .refine(within(parseDuration, least, most), { error: `must be ${bounds}`, when: ({ issues }) => issues.length === 0 });
const interval = duration(0.001, 366 * 86_400_000, 'from 0.001 ms to 366 d');
const keepalive = duration(1000, 65_535_000, 'from 1 s to 65535 s (18 h)');
const size = (least: number, most: number, bounds: string) =>
  z
    .string({ error: "must be a size with its unit, such as '10 MB'" })
    .regex(SIZE, { error: "must be a size with its unit: '500 kB', '10 MB' or '1 GB'" })
    .refine(within(parseSize, least, most), { error: `must be ${bounds}`, when: ({ issues }) => issues.length === 0 });
const rate = z
  .string({ error: "must be a rate such as '1 per day'" })
  .regex(RATE, { error: "must be a rate: '1 per day', or so many per hour, week or month" })
  .refine((text) => (parseRate(text) ?? 0) > 0, { error: 'must be more than 0', when: ({ issues }) => issues.length === 0 });

const limits = z
  .tuple([number, number], { error: 'must be two numbers, [low, high]' })
  .refine(([low, high]) => low < high, { error: 'must have the lower number first' });

const rule = z.enum(RULES, { error: 'is no rule' });
const rules = z.array(rule, { error: 'must be a list of rules' });
const k = positive.max(40, { error: 'must be at most 40' });

const secret = z.union([z.strictObject({ env: words(200) }), z.strictObject({ file: words(1000) })], {
  error: 'must be {env: NAME} or {file: PATH}: a secret never stands in a stand file',
});

const lines = z.enum(['number', 'csv', 'pairs', 'json'], { error: 'must be one of number, csv, pairs, json' });

const serial = z.union(
  [
    words(1000),
    z.strictObject({
      path: words(1000),
      baudRate: whole.min(50, { error: 'must be at least 50' }).max(12_000_000, { error: 'must be at most 12000000' }).default(9600),
      dataBits: z.literal([5, 6, 7, 8], { error: 'must be 5, 6, 7 or 8' }).default(8),
      parity: z.enum(['none', 'even', 'odd'], { error: 'must be none, even or odd' }).default('none'),
      stopBits: z.literal([1, 2], { error: 'must be 1 or 2' }).default(1),
    }),
  ],
  { error: 'must be the path of a port, or {path, baudRate, dataBits, parity, stopBits}' },
);

const simulated = z.union(
  [
    z.literal('pump cell'),
    z.strictObject({
      seed: whole.default(1),
      faults: z.boolean({ error: 'must be true or false' }).default(true),
      speed: number.min(0, { error: 'must be at least 0' }).default(1),
    }),
  ],
  { error: "must be 'pump cell', or {seed, faults, speed}" },
);

/** A source has exactly one of these keys; it says what kind of source it is. */
export const KINDS = ['serial', 'mqtt', 'recording', 'stdin', 'simulated'] as const;

export const sourceSchema = z.strictObject({
  serial: serial.optional().describe('A serial line: the path of the port, or {path, baudRate 9600, dataBits 8, parity none, stopBits 1}.'),
  mqtt: words(1000).optional().describe('A broker: mqtt://host:port or mqtts://host:port.'),
  recording: words(1000).optional().describe('A file of readings, CSV with header or JSON Lines, plain or gzip.'),
  stdin: z.literal(true, { error: 'must be true' }).optional().describe('Standard input.'),
  simulated: simulated.optional().describe('The simulated coolant-pump cell.'),
  lines: lines.optional().describe('How a line of a serial source or standard input is read. number unless columns are given.'),
  columns: z.array(words(80), { error: 'must be a list of names' }).optional().describe("For csv: the columns' names in order; '-' skips one."),
  maxLine: whole.min(8, { error: 'must be at least 8' }).max(65536, { error: 'must be at most 65536' }).optional().describe('Longest line in bytes; 256.'),
  protocol: z.enum(['3.1.1', '5'], { error: "must be '3.1.1' or '5', in quotes" }).optional().describe("MQTT version; '3.1.1'."),
  clientId: words(200).optional().describe('Fixed and used by no other client; made from the stand and the host otherwise.'),
  keepalive: keepalive.optional().describe('MQTT keep-alive; 15 s.'),
  qos: z.literal([0, 1], { error: 'must be 0 or 1' }).optional().describe('MQTT quality of service; 1.'),
  ca: words(1000).optional().describe('PEM file of the authority that signed the broker; else those of the system.'),
  cert: words(1000).optional().describe("PEM file of kilter's own certificate."),
  key: words(1000).optional().describe("PEM file of its key."),
  user: secret.optional().describe('Where the user name is found: {env: NAME} or {file: PATH}.'),
  password: secret.optional().describe('Where the password is found: {env: NAME} or {file: PATH}.'),
  maxPayload: size(1, 268_435_455, 'at most 268 MB, as MQTT has it').optional().describe('Largest MQTT payload; 64 kB.'),
});

const band = z.union(
  [
    z.strictObject({
      centre: number,
      sigma: positive,
      n: whole.min(2, { error: 'must be at least 2' }).optional(),
    }),
    words(200),
  ],
  { error: "must be {centre, sigma}, or 'learn' and a number of readings, such as 'learn 500'" },
);

const watched = {
  k: k.optional().describe('Control limits in sigmas; 3. The zones of all rules are stretched by k / 3.'),
  rules: rules.optional().describe(`Run rules; ${ZONE_RULES.join(', ')}.`),
  clearAfter: whole.min(1, { error: 'must be at least 1' }).max(1_000_000, { error: 'must be at most 1000000' }).optional().describe('Readings in a row back in the band after which an alarm clears; 10.'),
  window: whole.min(2, { error: 'must be at least 2' }).max(100_000, { error: 'must be at most 100000' }).optional().describe('Readings in the rolling window; 500.'),
};

export const channelSchema = z.strictObject({
  from: words(200).describe('source, or source/field.'),
  topic: words(1000).optional().describe('MQTT topic or filter.'),
  value: z.string({ error: 'must be text' }).optional().describe('JSON Pointer (RFC 6901) to the number; absent: the payload is the number.'),
  time: z.string({ error: 'must be text' }).optional().describe("JSON Pointer to the reading's own time; absent: the time of arrival."),
  sequence: z.string({ error: 'must be text' }).optional().describe('JSON Pointer to a sequence number: what was seen already is dropped.'),
  unit: z
    .string({ error: 'must be text' })
    .max(20, { error: 'is longer than 20 characters' })
    .regex(VISIBLE, { error: 'holds control characters' })
    .default('')
    .describe('Unit of the values, as it is to be shown.'),
  every: interval.optional().describe('Interval at which readings are due.'),
  silentAfter: interval.optional().describe('Silence after which the channel alarms; five intervals, at least 2 s.'),
  range: limits.optional().describe('What the instrument can report.'),
  tolerance: limits.optional().describe('What the work may be; no statistical limit.'),
  resolution: positive.optional().describe('Smallest step of the instrument.'),
  band: band.default('learn 500').describe("{centre, sigma}, or 'learn 500': from the first 500 readings."),
  sideRun: whole.min(2, { error: 'must be at least 2' }).max(100, { error: 'must be at most 100' }).default(8).describe('Length of the run that eight-one-side asks for.'),
  frozen: z.boolean({ error: 'must be true or false' }).default(true).describe('Whether a value that repeats incredibly long alarms.'),
  frozenOdds: positive.lt(1, { error: 'must be less than 1' }).default(1e-9).describe('Odds below which a run of one value is not credible.'),
  ...watched,
});

export const standSchema = z.strictObject({
  stand: words(120).describe('Name of the stand.'),
  watch: z
    .strictObject({
      limits: z.enum(['textbook', 'budget'], { error: 'must be textbook or budget' }).default('budget').describe('textbook: k sigmas; budget: limits that keep the false-alarm budget.'),
      falseAlarms: rate.default('1 per day').describe("The false-alarm budget of the whole stand, such as '1 per day'."),
      ...watched,
    })
    .prefault({})
    .describe('How the stand is watched, and defaults for all channels.'),
  log: z
    .strictObject({
      file: words(1000).optional().describe('The alarm log, relative to the stand file; <stand file>.alarms.jsonl.'),
      maxSize: size(10_000, 1e12, 'from 10 kB to 1000 GB').default('10 MB').describe('Size at which a new file is begun.'),
    })
    .prefault({}),
  sources: z.record(name, sourceSchema, { error: 'must be sources by name' }),
  channels: z.record(name, channelSchema, { error: 'must be channels by name' }),
});

export type StandFile = z.output<typeof standSchema>;
export type SourceEntry = StandFile['sources'][string];
export type ChannelEntry = StandFile['channels'][string];
