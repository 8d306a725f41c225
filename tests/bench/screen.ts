import { PassThrough, Writable } from 'node:stream';
import ContribLine from 'blessed-contrib/lib/widget/charts/line.js';
import type { BlessedScreen } from '../../src/screen/blessed.js';
import { RasterCanvas } from '../../src/screen/canvas.js';
import { drawFrame } from '../../src/screen/frame.js';
import type { ChannelView, StandView } from '../../src/screen/model.js';
import { Raster } from '../../src/screen/raster.js';
import { openBlessed, terminalProfile } from '../../src/screen/terminal.js';
import { theme } from '../../src/screen/theme.js';
import { initialUi } from '../../src/screen/ui.js';
import { inventedStand } from '../screen/inventedStand.js';
import type { BenchRow } from './row.js';

const FRAMES = 60;
const PROFILE = terminalProfile({ TERM: 'xterm-256color', LANG: 'C.UTF-8' });
const Line = ContribLine as new (options: object) => { setData(series: readonly object[]): void };

/** Whole frames of the screen, every channel scrolling by one reading a frame, against one chart of blessed-contrib's own line widget. */
export function bench(): BenchRow[] {
  const rows: BenchRow[] = [];
  for (const [width, height] of [[80, 24], [120, 40], [200, 60]] as const) {
    const size = `${width}x${height}`;
    const rival = contribLine(width, height);
    rows.push({ name: `${size}: blessed-contrib's line, one chart of 120 readings`, value: rival.ms, unit: 'ms/frame' });
    for (const channels of [6, 200]) {
      const { ms, bytes } = whole(width, height, channels);
      rows.push(
        { name: `${size}, ${channels} channels: a whole frame`, value: ms, unit: 'ms/frame' },
        { name: `${size}, ${channels} channels: bytes of a frame`, value: bytes, unit: 'bytes' },
        { name: `${size}, ${channels} channels: contrib's one chart over our whole frame`, value: rival.ms / ms, unit: 'times', goal: 'above 1', met: rival.ms > ms },
      );
    }
    rows.push({ name: `${size}: bytes of a frame, contrib's line`, value: rival.bytes, unit: 'bytes' });
  }
  return rows;
}

interface Cost {
  readonly ms: number;
  readonly bytes: number;
}

function whole(width: number, height: number, channels: number): Cost {
  return measure(width, height, (screen) => {
    const view = inventedStand({}, channels);
    const [raster, colours, ui] = [new Raster('braille'), theme(256), initialUi()];
    let now = view;
    new RasterCanvas(screen, raster, () => drawFrame(raster, colours, now, ui)).attach();
    return (frame) => {
      scroll(view);
      now = { ...view, now: view.now + frame * 125 };
    };
  });
}

function contribLine(width: number, height: number): Cost {
  return measure(width, height, (screen) => {
    const view = inventedStand({}, 1);
    const { trend, trendLength, band } = view.channels[0]!;
    const line = new Line({ top: 0, left: 0, width: '100%', height: '100%', minY: band!.low - 0.1, maxY: band!.high + 0.1, showLegend: false });
    screen.append(line as never);
    const x = Array.from({ length: 120 }, (_, i) => String(i));
    const level = (value: number): object => ({ x, y: x.map(() => value), style: { line: 'white' } });
    return () => {
      scroll(view);
      line.setData([{ x, y: Array.from(trend.subarray(trendLength - 120, trendLength)), style: { line: 'white' } }, level(band!.low), level(band!.centre), level(band!.high)]);
    };
  });
}

/** The best of three rounds: the least disturbed. */
function measure(width: number, height: number, start: (screen: BlessedScreen) => (frame: number) => void): Cost {
  let bytes = 0;
  const output = Object.assign(
    new Writable({
      decodeStrings: false,
      write: (chunk: string | Buffer, _encoding, done) => {
        bytes += Buffer.byteLength(chunk);
        done();
      },
    }),
    { isTTY: true, columns: width, rows: height },
  );
  const input = Object.assign(new PassThrough(), { isTTY: true, isRaw: false, setRawMode: () => undefined });
  const screen = openBlessed(PROFILE, input, output);
  const next = start(screen);
  let best = Infinity;
  for (let round = 0; round < 3; round++) {
    if (round === 1) bytes = 0; // the first draws all anew
    const began = performance.now();
    for (let frame = 0; frame < FRAMES; frame++) {
      next(round * FRAMES + frame);
      screen.render();
      screen.program.flush(); // blessed would gather the frames of the whole loop and write them at its end
    }
    best = Math.min(best, (performance.now() - began) / FRAMES);
  }
  screen.destroy();
  return { ms: best, bytes: bytes / (2 * FRAMES) };
}

/** One reading more on each channel: the oldest comes again. */
function scroll({ channels }: StandView): void {
  for (const channel of channels as readonly (ChannelView & { index: number })[]) {
    const { trend, trendLength } = channel;
    channel.index++;
    const [first] = trend;
    trend.copyWithin(0, 1, trendLength);
    trend[trendLength - 1] = first!;
  }
}
