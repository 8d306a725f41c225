import type { StandView } from './model.js';
import type { Ui } from './ui.js';

export const standing = (view: StandView): number => view.alarms.reduce((sum, { clearedAt }) => sum + (clearedAt === null ? 1 : 0), 0);

/** The state of the stand in words. */
export function stateWords(view: StandView): string {
  const alarms = standing(view);
  const total = view.channels.length;
  if (alarms > 0) {
    const channels = view.channels.filter(({ state }) => state === 'alarm').length;
    return `${alarms} ${alarms === 1 ? 'alarm stands' : 'alarms stand'} on ${channels} of ${total} ${total === 1 ? 'channel' : 'channels'}`;
  }
  if (total === 0) return 'no channels';
  const waiting = view.channels.filter(({ state }) => state === 'waiting').length;
  const settling = view.channels.filter(({ state }) => state === 'settling').length;
  if (waiting === total) return 'waiting for the first readings';
  if (settling + waiting > 0) return `${settling + waiting} of ${total} ${total === 1 ? 'channel' : 'channels'} still settling, no alarm`;
  return total === 1 ? 'the channel is in its band' : `all ${total} channels are in their bands`;
}

/** What to do next, by what is most pressing. */
export function advice(view: StandView, ui: Ui, selected: number): string {
  const lost = view.sources.find(({ phase }) => phase === 'lost');
  const channel = view.channels[selected];
  if (ui.far) return 'f goes back to the picture.';
  if (ui.held) return 'The picture is held, the watch goes on: space lets it run.';
  if (view.logTrouble !== null) return 'Mend the alarm log first (see below).';
  if (standing(view) > 0 && channel?.state !== 'alarm') return 'n goes to the channel in alarm.';
  if (lost) return 'See to the lost source: its cable, device or broker.';
  if (standing(view) > 0) return `Enter: ${ui.figures ? 'alarms in words' : 'figures of the channel'}.  n: next alarm.`;
  if (view.channels.length === 0) return 'Add channels to the stand file and start again.';
  if (channel?.state === 'waiting') return channel.stale ? 'The value shown is an old one; a reading has yet to come.' : 'Nothing has come: is the sensor on?';
  if (channel?.state === 'settling') return 'The band is being learned: let the stand run as it should.';
  return `Nothing to do.  Enter: ${ui.figures ? 'alarms' : 'figures'}.  f: far view.`;
}
