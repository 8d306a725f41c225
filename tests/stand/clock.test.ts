import { describe, expect, it } from 'vitest';
import { Clock } from '../../src/stand/clock.js';

function rig(): { clock: Clock; pass(ms: number, wallMs?: number): void; set(ms: number): void; steps: number[] } {
  let wall = 1_700_000_000_000;
  let mono = 0;
  const steps: number[] = [];
  const clock = new Clock((step) => steps.push(step), () => wall, () => mono);
  return {
    clock,
    steps,
    pass: (ms, wallMs = ms) => {
      mono += ms;
      wall += wallMs;
    },
    set: (ms) => (wall += ms),
  };
}

describe("the stand's clock", () => {
  it('goes on as before when the system clock is set back an hour, and says so once', () => {
    const { clock, pass, set, steps } = rig();
    const before = clock.now();
    set(-3_600_000);
    for (let i = 0; i < 6; i++) {
      pass(10_000);
      clock.follow();
    }
    expect(clock.now()).toBe(before + 60_000);
    expect(steps).toEqual([-3_600_000]);
  });

  it('reports a second step by its own size', () => {
    const { clock, pass, set, steps } = rig();
    for (const step of [5000, -2000]) {
      set(step);
      pass(10_000);
      clock.follow();
    }
    expect(steps).toEqual([5000, -2000]);
  });

  it('follows a system clock that runs 100 ppm fast or slow to within 20 ms over a day, and never goes back', () => {
    for (const ppm of [100, -100]) {
      const { clock, pass, steps } = rig();
      let last = clock.now();
      const start = last;
      for (let i = 0; i < 8640; i++) {
        pass(10_000, 10_000 * (1 + ppm * 1e-6));
        clock.follow();
        expect(clock.now()).toBeGreaterThanOrEqual(last);
        last = clock.now();
      }
      expect(Math.abs(last - start - 86_400_000 * (1 + ppm * 1e-6))).toBeLessThan(20);
      expect(steps).toEqual([]);
    }
  });
});
