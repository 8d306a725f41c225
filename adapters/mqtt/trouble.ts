import { clean } from '../../src/text/clean.js';

const SPEAKS_NOT = (other: string): string => `it does not speak this protocol version: try 'protocol: "${other}"'`;
const NO_ID = 'it does not accept the client identifier: give another clientId';
const AWAY = 'it is not available at the moment';
const WRONG = 'user name or password is wrong: look at user and password of the source';
const NOT_ALLOWED = 'this client is not authorised: look at user, password and the access rules of the broker';

/** Return codes of CONNACK: MQTT 3.1.1, 3.2.2.3 (below 128) and MQTT 5, 3.2.2.2. */
const REFUSALS: Readonly<Record<number, string>> = {
  1: SPEAKS_NOT('5'),
  2: NO_ID,
  3: AWAY,
  4: WRONG,
  5: NOT_ALLOWED,
  132: SPEAKS_NOT('3.1.1'),
  133: NO_ID,
  134: WRONG,
  135: NOT_ALLOWED,
  136: AWAY,
  137: 'it is busy',
  138: 'this client is banned',
};

/** Reason codes with which an MQTT 5 broker says good-bye (3.14.2.1). */
const GOODBYES: Readonly<Record<number, string>> = {
  130: 'it saw a breach of the protocol',
  135: NOT_ALLOWED,
  137: 'it is busy',
  139: 'it is shutting down',
  141: 'it heard nothing from here within the keep-alive',
  142: 'another client has taken over this client identifier: give each client its own clientId',
  147: 'too many messages were under way',
  149: 'a packet was too large',
  151: 'a quota is used up',
};

/** Why an MQTT 5 broker ended the connection. @param broker its address, for the sentence */
export function goodbye(code: number, broker: string): string {
  return `${broker} has ended the connection: ${GOODBYES[code] ?? `reason ${code}`}.`;
}

/** Why there is no connection, as a sentence with the mend. @param broker its address, for the sentence */
export function connectionTrouble(error: unknown, broker: string): string {
  const { code, message = 'unknown reason', reason = '' } = error as { code?: string | number; message?: string; reason?: string };
  if (typeof code === 'number') return `${broker} refuses the connection: ${REFUSALS[code] ?? `reason ${code}`}.`;
  switch (code) {
    case 'ECONNREFUSED':
      return `Nobody answers at ${broker}: is the broker running, and is the port right?`;
    case 'ENOTFOUND':
    case 'EAI_AGAIN':
    case 'EAI_FAIL':
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
    case 'CERT_SIGNATURE_FAILURE':
      return `The certificate of ${broker} is not signed by an authority that is trusted here: give the right one with 'ca:'.`;
    case 'CERT_HAS_EXPIRED':
    case 'CERT_NOT_YET_VALID':
      return `The certificate of ${broker} is not valid today: renew it on the broker, or set the clock.`;
    case 'ERR_TLS_CERT_ALTNAME_INVALID':
      return `The certificate of ${broker} is made out to another name: ${clean(reason, 120)}`;
    case 'ERR_SSL_TLSV13_ALERT_CERTIFICATE_REQUIRED':
      return `${broker} asks for a certificate of this client: give one with 'cert:' and 'key:'.`;
    default:
      return other(code, message, broker);
  }
}

function other(code: string | undefined, message: string, broker: string): string {
  if (code && /^ERR_SSL|^ERR_TLS|^EPROTO$/.test(code))
    return `TLS with ${broker} fails (${clean(code, 60)}): is it a TLS port, and do the certificates fit?`;
  if (/connack timeout/i.test(message)) return `${broker} has not answered in time: look at the network and the firewall, and whether it is an MQTT broker.`;
  if (/keepalive timeout/i.test(message)) return `${broker} does not answer any more.`;
  return `No connection to ${broker}: ${clean(message, 160)}`;
}
