import type { ChannelView, StandView } from './model.js';

/** The channels as they are at this moment: their pictures are copied out of the buffers that the next frame fills. */
export function holdChannels({ channels }: StandView): ReadonlyMap<string, ChannelView> {
  return new Map(channels.map((channel) => [channel.channel, { ...channel, trend: channel.trend.slice(), trendTimes: channel.trendTimes.slice() }]));
}

/** The stand as it is, with the held pictures and figures. States, alarms, sources and the clock go on: who holds a picture must not miss an alarm. */
export function withHeld(view: StandView, held: ReadonlyMap<string, ChannelView>): StandView {
  return {
    ...view,
    channels: view.channels.map((channel) => {
      const before = held.get(channel.channel);
      return before ? { ...before, state: channel.state, settled: channel.settled } : channel;
    }),
  };
}
