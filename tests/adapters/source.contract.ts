import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, describe, expect, it } from 'vitest';
import type { Source } from '../../adapters/source.js';
import { clean } from '../../src/text/clean.js';
import { RecordingSink, until } from './recordingSink.js';

/** One source on its transport, set up anew for every fact. */
export interface SourceBench {
  /** The source, not started. */
  readonly source: Source;
  /** The slot whose readings {@link feed} makes; 0 by default. Readings of other slots are left out of account. */
  readonly slot?: number;
  /** The value of reading k, where the kind of source makes its own values; {@link valueOf} by default. */
  readonly made?: (k: number) => number;
  /**
   * Puts the readings from <= k < to on the transport, in this order. For a source that must find everything when it
   * starts (`prepared`) it is called before the start, else after the source has said 'open'.
   */
  readonly feed: (from: number, to: number) => Promise<void>;
  /** Puts a text that is no reading on the transport, as one line, row or payload; absent where that cannot be done. */
  readonly garble?: (text: string) => Promise<void>;
  /** Cuts the connection; absent for kinds that have none. */
  readonly break?: () => Promise<void>;
  /** Makes the connection possible again. */
  readonly restore?: () => Promise<void>;
  /** Lets a finite source come to its end after what was fed; absent for live sources. */
  readonly finish?: () => Promise<void>;
  /** Frees the transport. The source has been stopped. */
  readonly dispose: () => Promise<void>;
}

export interface SourceTraits {
  /** Everything is on the transport before the source starts (a file); else readings are fed while it runs. */
  readonly prepared?: boolean;
  /** It can be garbled, cut and restored, or comes to an end: facts about that are stated only for kinds that can. */
  readonly garbles?: boolean;
  readonly breaks?: boolean;
  readonly ends?: boolean;
}

/** The value of reading k: different for every k, rising, and exact in four decimals. */
export function valueOf(k: number): number {
  return Number((20 + k / 16).toFixed(4));
}

/** What a hostile instrument might send: an escape sequence, a window title, a bell, a text direction, tags, no end. */
const HOSTILE = [
  'x\u001b[2J\u001b]0;owned\u0007',
  '\u009b31mred\u202eesrever',
  '{bold}{/bold}<script>alert(1)</script>',
  `${'A'.repeat(150)}\u001b[31m`,
];

/**
 * The promises that every source keeps, whatever its transport. `setUp` makes a fresh bench; it is disposed of
 * after the fact.
 */
export function describeSource(name: string, setUp: () => Promise<SourceBench>, traits: SourceTraits = {}): void {
  describe(`the ${name} source keeps the contract of sources`, () => {
    let bench: SourceBench | null = null;
    let sink = new RecordingSink();

    const open = async (feed: number, hold = false): Promise<SourceBench> => {
      sink = new RecordingSink(hold);
      bench = await setUp();
      if (traits.prepared) await bench.feed(0, feed);
      bench.source.start(sink);
      if (!traits.prepared) {
        await until(() => sink.is('open'), 'the source has opened');
        await bench.feed(0, feed);
      }
      return bench;
    };
    const values = (): number[] => sink.values(bench?.slot ?? 0);
    const fed = (from: number, to: number): number[] =>
      Array.from({ length: to - from }, (_, i) => (bench?.made ?? valueOf)(from + i));
    const come = (count: number): Promise<void> => until(() => values().length >= count, `${count} readings have come`);

    afterEach(async () => {
      await bench?.source.stop();
      await bench?.dispose();
      bench = null;
      for (const { sentence } of sink.phases) expect(clean(sentence, 10_000)).toBe(sentence);
    });

    it('returns from start at once, before any reading', async () => {
      bench = await setUp();
      sink = new RecordingSink();
      if (traits.prepared) await bench.feed(0, 10);
      bench.source.start(sink);
      expect(sink.readings).toEqual([]);
    });

    it('delivers each reading once and in order', async () => {
      await open(300);
      await come(300);
      await sleep(30); // time for one too many
      expect(values().slice(0, 300)).toEqual(fed(0, 300));
      if (!bench?.made) expect(values()).toHaveLength(300);
      expect(sink.faults).toEqual([]);
    });

    it('delivers times that never fall and are real times', async () => {
      await open(200);
      await come(200);
      const times = sink.readings.filter((reading) => reading.slot === (bench?.slot ?? 0)).map((reading) => reading.time);
      expect(times.every(Number.isFinite)).toBe(true);
      expect(times).toEqual(times.toSorted((a, b) => a - b));
    });

    it('loses nothing when the sink holds it back', async () => {
      await open(200, true);
      await come(200);
      expect(values().slice(0, 200)).toEqual(fed(0, 200));
    });

    it('never calls the sink after stop has resolved', async () => {
      const { source, feed } = await open(100);
      await source.stop();
      sink.close();
      if (!traits.prepared) await feed(100, 200).catch(() => undefined);
      await sleep(150);
      expect(sink.late).toEqual([]);
    });

    it('says last that it stopped, or that it ended', async () => {
      const { source } = await open(20);
      await come(20);
      await source.stop();
      expect(['stopped', 'ended']).toContain(sink.phases.at(-1)?.phase);
    });

    it('may be stopped twice, at the same time or later, and has then ended', async () => {
      const { source } = await open(5);
      await Promise.all([source.stop(), source.stop()]);
      await source.stop();
      await source.ended;
      expect(sink.phases.filter(({ phase }) => phase === 'stopped').length).toBeLessThanOrEqual(1);
    });

    it('may be stopped before it was started, or while it opens', async () => {
      bench = await setUp();
      sink = new RecordingSink();
      await bench.source.stop();
      await bench.dispose();
      bench = await setUp();
      bench.source.start(sink);
      await bench.source.stop();
      sink.close();
      await sleep(100);
      expect(sink.late).toEqual([]);
    });

    if (traits.garbles)
      it('counts what is no reading, hostile or not, and goes on', async () => {
        sink = new RecordingSink();
        bench = await setUp();
        const { source, feed, garble } = bench;
        if (!garble) throw new Error('A bench with the trait `garbles` needs garble().');
        const put = async (): Promise<void> => {
          await feed(0, 20);
          for (const text of HOSTILE) await garble(text);
          await feed(20, 40);
        };
        if (traits.prepared) await put();
        source.start(sink);
        if (!traits.prepared) {
          await until(() => sink.is('open'), 'the source has opened');
          await put();
        }
        await come(40);
        expect(values()).toEqual(fed(0, 40));
        expect(sink.faults.length).toBeGreaterThanOrEqual(HOSTILE.length);
      });

    if (traits.breaks)
      it('outlives a broken connection: nothing invented, nothing twice, and it goes on', async () => {
        const { feed, ...far } = await open(50);
        if (!far.break || !far.restore) throw new Error('A bench with the trait `breaks` needs break() and restore().');
        await come(50);
        await far.break();
        await until(() => sink.phases.some(({ phase }) => phase === 'lost'), 'the loss was told');
        await far.restore();
        await until(() => sink.is('open'), 'the source has opened again');
        let next = 50;
        await until(() => values().length > 0, 'readings came before');
        for (let tries = 0; values().length < 60 && tries < 200; tries++) {
          await feed(next, next + 10); // the first line after an opening may be a torn one, and is dropped
          next += 10;
          await sleep(20);
        }
        await until(() => values().includes((bench?.made ?? valueOf)(next - 1)), 'the newest reading has come');
        const known = new Set(fed(0, next));
        expect(values().filter((value) => !known.has(value))).toEqual([]);
        expect(values()).toEqual([...new Set(values())].toSorted((a, b) => a - b));
      });

    if (traits.ends)
      it('ends by itself, after its last reading', async () => {
        const { source, finish } = await open(64);
        if (!finish) throw new Error('A bench with the trait `ends` needs finish().');
        await finish();
        await source.ended;
        expect(values()).toEqual(fed(0, 64));
        expect(sink.is('ended')).toBe(true);
      });
  });
}
