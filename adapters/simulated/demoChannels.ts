import { INSTRUMENTS } from './cell.js';
import { EVERY, SETTLING } from './schedule.js';

/** The zone rules that watch the demo's channels, by the names of the stand file. */
type DemoRule = 'one-beyond-3' | 'two-of-three-beyond-2' | 'eight-one-side';

/** Everything a stand must know of one channel of the demo. Plain data. */
export interface DemoChannel {
  readonly channel: string;
  readonly unit: string;
  /** Spacing of readings, ms. */
  readonly every: number;
  /** Silence after which the channel counts as silent, ms. */
  readonly silentAfter: number;
  readonly range: readonly [number, number];
  readonly tolerance: readonly [number, number] | null;
  readonly resolution: number;
  /** Readings to learn the band from. */
  readonly learn: number;
  /** Control limits in sigmas; all zones are stretched by k / 3. */
  readonly k: number;
  readonly rules: readonly DemoRule[];
  /** Length of the run that `eight-one-side` asks for. */
  readonly sideRun: number;
  /** Odds below which a run of equal values counts as frozen. */
  readonly frozenOdds: number;
  /** Quiet readings after which an alarm clears. */
  readonly clearAfter: number;
  /** How it reaches the stand, and what to look for there. */
  readonly over: 'mqtt' | 'lines';
  readonly topic: string | null;
  /** JSON Pointer into the payload; null: the payload is the number. */
  readonly value: string | null;
  readonly field: string | null;
}

/** Over MQTT: one as a bare number, two as JSON. On a line like a logger's: in the order of its columns. */
export const MQTT_CHANNELS = ['bearing', 'vibration', 'supply'] as const;
export const LINE_CHANNELS = ['flow', 'inlet', 'outlet'] as const;

export const topicOf = (channel: string): string => `cell3/${channel}`;
export const pointerOf = (channel: string): string | null => (channel === 'supply' ? null : '/value');

/**
 * Textbook zones would cry wolf every 1.5 s on these six channels together (60 readings a second, one false alarm in
 * 91.75 readings). Stretched by 1.8, with a run of 24 on one side and without `four-of-five-beyond-1` (the rule that costs
 * most at this rate), they give 0.05 false alarms an hour if the bands were known exactly, and 0.12 an hour with bands
 * learned from 200 readings, on the average over what may be learned: one in about 8 hours.
 * tests/adapters/simulatedDemo.test.ts computes both.
 */
const WATCH = { k: 5.4, rules: ['one-beyond-3', 'two-of-three-beyond-2', 'eight-one-side'], sideRun: 24 } as const;

/** The channels of the demo, in the order of the cell's instruments. */
export const DEMO_CHANNELS: readonly DemoChannel[] = INSTRUMENTS.map(({ channel, unit, range, resolution }) => {
  const overMqtt = (MQTT_CHANNELS as readonly string[]).includes(channel);
  return {
    channel,
    unit,
    every: EVERY,
    silentAfter: 20 * EVERY,
    range,
    tolerance: channel === 'flow' ? ([38, 44] as const) : null,
    resolution,
    learn: SETTLING,
    ...WATCH,
    frozenOdds: 1e-9,
    clearAfter: 30,
    over: overMqtt ? ('mqtt' as const) : ('lines' as const),
    topic: overMqtt ? topicOf(channel) : null,
    value: overMqtt ? pointerOf(channel) : null,
    field: overMqtt ? null : channel,
  };
});
