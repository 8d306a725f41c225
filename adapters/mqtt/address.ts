import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';

/** Where a broker is: all that an address may say. */
export interface BrokerAddress {
  readonly protocol: 'mqtt' | 'mqtts';
  readonly host: string;
  readonly port: number;
  /** For messages. */
  readonly label: string;
}

/**
 * Reads mqtt://host:1883 or mqtts://host:8883 (the ports are the defaults). Nothing else may stand in an address: a user
 * name or password would end up in messages, a query could quietly change the client's options.
 * @throws UserError where it is no such address; the message holds no part of what may be a secret
 */
export function brokerAddress(url: string): BrokerAddress {
  const mend = 'Write mqtt://host:1883 or mqtts://host:8883.';
  if (!URL.canParse(url)) throw new UserError('The address of the broker is no address.', mend);
  const { protocol, hostname, port, username, password, search, hash, pathname, host } = new URL(url);
  if (username !== '' || password !== '')
    throw new UserError('A user name or password stands in the address of the broker.', "Take it out; write 'user: {env: NAME}' and 'password: {file: PATH}'.");
  if (protocol !== 'mqtt:' && protocol !== 'mqtts:') throw new UserError(`'${clean(protocol, 20)}' is no way to reach a broker.`, mend);
  if (hostname === '') throw new UserError('The address of the broker names no host.', mend);
  if (search !== '' || hash !== '' || (pathname !== '' && pathname !== '/'))
    throw new UserError('The address of the broker says more than protocol, host and port.', mend);
  const secure = protocol === 'mqtts:';
  return {
    protocol: secure ? 'mqtts' : 'mqtt',
    host: hostname.replace(/^\[(.*)\]$/, '$1'),
    port: port === '' ? (secure ? 8883 : 1883) : Number(port),
    label: `${protocol}//${clean(host, 120)}`,
  };
}
