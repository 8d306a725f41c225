import { clean } from '../../src/text/clean.js';

/** Where a broker is, without anything secret. */
export function brokerName(url: string): string {
  try {
    const { host, protocol } = new URL(url);
    return `${protocol}//${clean(host, 120)}`;
  } catch {
    return 'the broker';
  }
}

/** CONNACK codes of MQTT 3.1.1 (3.2.2.3) and reason codes of MQTT 5 (3.2.2.2). */
const REFUSALS: Readonly<Record<number, string>> = {
  1: "it does not speak this protocol version: try 'protocol: \"5\"' or '3.1.1'",
  2: 'it does not accept the client identifier: give another clientId',
  3: 'it is not available at the moment',
  4: 'user name or password is wrong: look at user and password of the source',
  5: 'this client is not authorised: look at user, password and the access rules of the broker',
  132: "it does not speak this protocol version: try 'protocol: \"3.1.1\"'",
  133: 'it does not accept the client identifier: give another clientId',
  134: 'user name or password is wrong: look at user and password of the source',
  135: 'this client is not authorised: look at user, password and the access rules of the broker',
  136: 'it is not available at the moment',
  137: 'it is busy',
  138: 'this client is banned',
};

/** Why there is no connection, as a sentence with the mend. */
export function connectionTrouble(error: unknown, url: string): string {
  const { code, message, reason } = error as { code?: string | number; message?: string; reason?: string };
  const broker = brokerName(url);
  if (typeof code === 'number') return `${broker} refuses the connection: ${REFUSALS[code] ?? `reason ${code}`}.`;
  switch (code) {
    case 'ECONNREFUSED':
      return `Nobody answers at ${broker}: is the broker running, and is the port right?`;
    case 'ENOTFOUND':
    case 'EAI_AGAIN':
      return `The host of ${broker} is not known: look at its name and at the network.`;
    case 'ETIMEDOUT':
    case 'EHOSTUNREACH':
    case 'ENETUNREACH':
      return `${broker} cannot be reached: look at the network and the firewall.`;
    case 'ECONNRESET':
    case 'EPIPE':
      return `${broker} has cut the connection.`;
    case 'SELF_SIGNED_CERT_IN_CHAIN':
    case 'DEPTH_ZERO_SELF_SIGNED_CERT':
    case 'UNABLE_TO_VERIFY_LEAF_SIGNATURE':
    case 'UNABLE_TO_GET_ISSUER_CERT':
    case 'UNABLE_TO_GET_ISSUER_CERT_LOCALLY':
      return `The certificate of ${broker} is not signed by an authority that is trusted here: give the right one with 'ca:'.`;
    case 'CERT_HAS_EXPIRED':
      return `The certificate of ${broker} has expired: renew it on the broker.`;
    case 'ERR_TLS_CERT_ALTNAME_INVALID':
      return `The certificate of ${broker} is made out to another name: ${clean(reason ?? '', 120)}`;
    default:
      if (typeof code === 'string' && (code.startsWith('ERR_SSL') || code.startsWith('ERR_TLS') || code === 'EPROTO'))
        return `TLS with ${broker} fails (${clean(code, 60)}): is it a TLS port, and do the certificates fit?`;
      return `No connection to ${broker}: ${clean(message ?? 'unknown reason', 160)}`;
  }
}
