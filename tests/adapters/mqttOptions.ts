import type { MqttOptions } from '../../adapters/options.js';
import type { Wanted } from '../../adapters/source.js';

let clients = 0;

/** Options for a broker under test: quick to come back, else the common ones. Each call has a client identifier of its own. */
export function atBroker(url: string, more: Partial<MqttOptions> = {}): MqttOptions {
  return {
    url,
    protocol: '3.1.1',
    clientId: `kilter-test-${process.pid}-${++clients}`,
    keepalive: 15_000,
    qos: 1,
    ca: null,
    cert: null,
    key: null,
    user: null,
    password: null,
    maxPayload: 65_536,
    retryFrom: 20,
    retryTo: 200,
    ...more,
  };
}

/** One channel on a topic whose payload is the number. */
export function wantedOn(topic: string, more: Partial<Wanted> = {}): Wanted {
  return { slot: 0, channel: 'flow', field: null, topic, value: null, time: null, sequence: null, every: null, ...more };
}
