import type { StandView } from './model.js';

/** A view model that stays as it is: its pictures are copied out of the buffers that the next frame fills. */
export function holdView(view: StandView): StandView {
  return {
    ...view,
    channels: view.channels.map((channel) => ({ ...channel, trend: channel.trend.slice(), trendTimes: channel.trendTimes.slice() })),
  };
}
