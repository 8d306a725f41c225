import { describe, expect, it } from 'vitest';
import { kilter } from './kilter.js';
import { onTerminal } from './terminal.js';

const RESTORED = ['\u001b[?1049l', '\u001b[?25h', '\u001b[?1006l']; // main screen, cursor shown, mouse off

describe('demo on a real terminal', () => {
  it('shows every channel at 80x24, answers keys, and leaves the terminal as it was', async () => {
    const demo = onTerminal(['demo'], 80, 24);
    const text = await demo.until(/supply +\d+\.\d+ V/);
    for (const channel of ['flow', 'inlet', 'outlet', 'bearing', 'vibration']) expect(text).toContain(channel);
    expect(text).toMatch(/settling/);
    expect(text).toContain('2 of 2 sources open');
    demo.pty.write('\u001b[B'); // down
    await demo.until(/── inlet \[bar\]/);
    demo.pty.write('?');
    await demo.until(/no safety system/);
    demo.pty.write('x');
    demo.pty.write('f');
    await demo.until(/██/);
    demo.pty.write('f');
    await demo.until(/── inlet/);
    demo.pty.write(' ');
    await demo.until(/held/);
    demo.pty.resize(120, 40);
    demo.pty.write('q');
    expect((await demo.exit).exitCode).toBe(0);
    for (const sequence of RESTORED) expect(demo.bytes()).toContain(sequence);
  });

  it('learns the bands, then tells the first fault in words', async () => {
    const demo = onTerminal(['demo'], 120, 40);
    await demo.until(/all 6 channels are in their bands/, 40_000);
    const text = await demo.until(/alarms? stands?/, 40_000);
    expect(text).toMatch(/■ ALARM low +flow/);
    await demo.until(/flow is below its control limit/);
    demo.pty.write('q');
    expect((await demo.exit).exitCode).toBe(0);
    expect(demo.rows().join('\n')).toMatch(/readings, \d+ alarms; the alarm log is/);
  });

  it.each(['SIGTERM', 'SIGHUP', 'SIGINT'])('restores the terminal on %s and closes its log', async (signal) => {
    const demo = onTerminal(['demo'], 80, 24);
    await demo.until(/settling/);
    demo.pty.kill(signal);
    await demo.exit;
    for (const sequence of RESTORED) expect(demo.bytes()).toContain(sequence);
  });

  it('sends neither colour with NO_COLOR nor anything but ASCII without UTF-8', async () => {
    const demo = onTerminal(['demo'], 80, 24, { NO_COLOR: '1', LC_ALL: 'C', LANG: 'C' });
    await demo.until(/supply/);
    await demo.until(/settling/);
    demo.pty.write('q');
    await demo.exit;
    const whileShown = demo.bytes().split('\u001b[?1049l')[0]!;
    expect(whileShown).not.toMatch(/\u001b\[(?:\d+;)*(?:3[0-8]|4[0-8]|9\d|10\d)(?:;\d+)*m/);
    expect(whileShown).toMatch(/^[\u0000-\u007f]*$/);
  });

  it('refuses a dumb terminal in a sentence that names what to use instead', async () => {
    const demo = onTerminal(['demo'], 80, 24, { TERM: 'dumb' });
    expect((await demo.exit).exitCode).toBe(2);
    expect(demo.bytes()).toContain('kilter guard');
  });

  it('runs headless for the time asked for', async () => {
    const demo = kilter(['demo', '--headless', '--for', '3s', '--seed', '7']);
    expect(await demo.exit).toBe(0);
    expect(demo.stderr()).toMatch(/"message":"source bus: Connected to mqtt:\/\/127\.0\.0\.1/);
    expect(demo.stderr()).toMatch(/Watched for 3(\.\d)? s: 1[6-9]\d readings/);
  });
});
