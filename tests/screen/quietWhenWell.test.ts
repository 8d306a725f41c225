import { afterEach, describe, expect, it } from 'vitest';
import { show, type Shown } from './fakeTty.js';
import { inventedStand, troubledStand } from './inventedStand.js';

let shown: Shown;
afterEach(() => shown.screen.close());

const GREYS = new Set([-1, ...Array.from({ length: 24 }, (_, i) => 232 + i)]); // the grey ramp of the 256 palette (xterm)

describe.each([[80, 24], [100, 30], [120, 40], [200, 60]])('at %i x %i', (columns, rows) => {
  it('while all is well there is no colour but greys', async () => {
    shown = await show(inventedStand(), { columns, rows });
    expect([...shown.tty.colours()].filter((colour) => !GREYS.has(colour))).toEqual([]);
    const [top] = shown.tty.lines();
    expect(top).toContain('coolant pump cell 2');
    expect(top).toContain('all 6 channels are in their bands');
    expect(top).toContain('09:41:30 UTC');
    for (const word of ['coolant-out', '82.52 °C', 'flow', 'L/min', 'motor-current', 'No alarm has been raised.', 'Nothing to do.', '30 readings/s'])
      expect(shown.tty.text()).toContain(word);
  });

  it('what is abnormal has a colour, a word and a shape', async () => {
    shown = await show(troubledStand(), { columns, rows });
    const { tty } = shown;
    expect(tty.lines()[0]).toContain('■ 2 alarms stand on 1 of 6 channels');
    expect(tty.colourOf('■ ALARM high')).toBe(167);
    expect(tty.colourOf('○ settling')).toBe(75);
    expect(tty.text()).toContain('120/500');
    expect(tty.colourOf('▸ plc lost: /dev/ttyUSB1 is not there')).toBe(220);
    expect(tty.text()).toContain('■ 1 min 12 s');
    expect(tty.text()).toContain('(1 in 58 600)');
    expect(tty.text()).toContain('n goes to the channel in alarm');
  });
});

it('the colours of a terminal with 16 and with 8', async () => {
  shown = await show(troubledStand(), { env: { TERM: 'xterm-16color', LANG: 'C.UTF-8' } });
  expect(shown.tty.colourOf('■ ALARM high')).toBe(9);
  shown.screen.close();
  shown = await show(troubledStand(), { env: { TERM: 'screen', LANG: 'C.UTF-8' } });
  expect(shown.tty.colourOf('■ ALARM high')).toBe(1);
  expect(Math.max(...shown.tty.colours())).toBeLessThan(8);
});
