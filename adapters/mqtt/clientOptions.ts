import { createSecureContext } from 'node:tls';
import type { IClientOptions } from 'mqtt';
import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import type { MqttOptions } from '../options.js';
import type { BrokerAddress } from './address.js';
import { fetchSecret, readOrSay } from './secret.js';

const CONNECT_WITHIN = 10_000; // ms
const SESSION_KEPT = 86_400; // s that an MQTT 5 broker keeps the session of an absent client; 3.1.1 has no such bound
/** Messages that an MQTT 5 broker may send ahead of their acknowledgement; 3.1.1 leaves the number to the broker. */
export const UNDER_WAY = 100;
const LARGEST_PACKET = 1_000_000; // bytes; MQTT 5 only

/**
 * The options of an MQTT session as kilter wants it: kept by the broker over lost connections, under a fixed client
 * identifier, and connected only when it is told to. Secrets and PEM files are fetched here, so that what is missing is
 * said before anything runs.
 * @throws UserError where a secret or PEM file is not there, or fits nothing
 */
export function clientOptions(name: string, options: MqttOptions, { protocol, host, port }: BrokerAddress): IClientOptions {
  const user = fetchSecret(options.user, 'user name', name);
  const password = fetchSecret(options.password, 'password', name);
  if (password !== null && user === null)
    throw new UserError(`The source ${clean(name, 60)} has a password, but no user name.`, 'MQTT sends a password only with a user name: give both.');
  return {
    protocol,
    host,
    port,
    manualConnect: true,
    protocolVersion: options.protocol === '5' ? 5 : 4,
    clientId: options.clientId,
    clean: false,
    keepalive: Math.max(1, Math.round(options.keepalive / 1000)),
    connectTimeout: CONNECT_WITHIN,
    reconnectPeriod: 0, // the waits between attempts are the source's: doubled, capped, with jitter
    reconnectOnConnackError: true,
    resubscribe: false, // on every connect all filters are subscribed to, whatever the broker remembers
    queueQoSZero: false,
    ...(options.protocol === '5' && {
      properties: {
        sessionExpiryInterval: SESSION_KEPT,
        receiveMaximum: UNDER_WAY,
        maximumPacketSize: Math.max(LARGEST_PACKET, 2 * options.maxPayload),
      },
    }),
    ...(user !== null && { username: user }),
    ...(password !== null && { password }),
    ...certificates(name, options, protocol),
  };
}

function certificates(name: string, { ca, cert, key }: MqttOptions, protocol: string): Pick<IClientOptions, 'ca' | 'cert' | 'key'> {
  const given = Object.entries({ ca, cert, key }).filter((entry): entry is [string, string] => entry[1] !== null);
  if (given.length === 0) return {};
  const whose = `the source ${clean(name, 60)}`;
  // Without this they would be ignored, and everything sent in the clear.
  if (protocol !== 'mqtts')
    throw new UserError(`Certificates are given for ${whose}, but its address is without TLS.`, 'Write mqtts:// in the address, or take them out.');
  if ((cert === null) !== (key === null)) throw new UserError(`Of cert and key, ${whose} has only one.`, 'Give both, or neither.');
  const pem = Object.fromEntries(given.map(([what, file]) => [what, readOrSay(file, `${what} of ${whose}`)]));
  for (const parts of [{ ca: pem['ca'] }, { cert: pem['cert'], key: pem['key'] }]) {
    try {
      createSecureContext(parts);
    } catch {
      const files = Object.keys(parts).map((what) => clean({ ca, cert, key }[what], 200));
      throw new UserError(`TLS cannot use what is in ${files.join(' and ')}.`, 'They must be PEM files, and a key must belong to its certificate.');
    }
  }
  return pem;
}
