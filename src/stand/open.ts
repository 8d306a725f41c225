import type { Source, Wanted } from '../../adapters/source.js';
import type { ChannelConfig, SourceConfig } from './types.js';

/**
 * What each source is to listen for. A channel's slot is its place in the stand file.
 * @returns for each source's name the channels that come from it
 */
export function wantedBySource(channels: readonly ChannelConfig[]): Map<string, Wanted[]> {
  const wanted = new Map<string, Wanted[]>();
  channels.forEach(({ origin, spec }, slot) => {
    const { source, field, topic, value, time, sequence } = origin;
    const list = wanted.get(source) ?? [];
    list.push({ slot, channel: spec.channel, field, topic, value, time, sequence, every: spec.every });
    wanted.set(source, list);
  });
  return wanted;
}

/** Opens no port yet: makes the source that `start` will open. Each adapter is loaded only where a stand has one. */
export async function openSource(config: SourceConfig, wanted: readonly Wanted[]): Promise<Source> {
  switch (config.kind) {
    case 'serial': {
      const { serialSource } = await import('../../adapters/serial/source.js');
      return serialSource(config.name, config.options, wanted);
    }
    case 'mqtt': {
      const { mqttSource } = await import('../../adapters/mqtt/source.js');
      return mqttSource(config.name, config.options, wanted);
    }
    case 'stdin': {
      const { stdinSource } = await import('../../adapters/stdin/source.js');
      return stdinSource(config.name, config.options, wanted);
    }
    case 'recording': {
      const { recordingSource } = await import('../../adapters/recording/source.js');
      return recordingSource(config.name, config.options, wanted);
    }
    case 'simulated': {
      const { simulatedSource } = await import('../../adapters/simulated/source.js');
      return simulatedSource(config.name, config.options, wanted);
    }
  }
}
