import { mqttSource } from '../../adapters/mqtt/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { describeSource, valueOf } from '../adapters/source.contract.js';
import { Broker } from './broker.js';

for (const protocol of ['3.1.1', '5'] as const)
  for (const qos of [0, 1] as const)
    describeSource(
      `MQTT ${protocol} at QoS ${qos}`,
      async () => {
        const broker = await Broker.start();
        const publisher = await broker.publisher();
        return {
          source: mqttSource('bus', atBroker(broker.url, { protocol, qos }), [wantedOn('cell/flow')]),
          feed: async (from, to) => {
            for (let k = from; k < to; k++) await publisher.publishAsync('cell/flow', String(valueOf(k)), { qos });
          },
          garble: async (text) => {
            await publisher.publishAsync('cell/flow', text, { qos });
          },
          break: () => broker.kill(),
          restore: () => broker.start(),
          dispose: async () => {
            await publisher.endAsync(true);
            await broker.dispose();
          },
        };
      },
      { garbles: true, breaks: true },
    );
