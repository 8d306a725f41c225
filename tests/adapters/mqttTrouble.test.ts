import { describe, expect, it } from 'vitest';
import { connectionTrouble, goodbye } from '../../adapters/mqtt/trouble.js';
import { clean } from '../../src/text/clean.js';

const BROKER = 'mqtt://host:1883';
const say = (error: object): string => connectionTrouble(error, BROKER);

// Codes of MQTT 3.1.1, 3.2.2.3, and MQTT 5, 3.2.2.2 and 3.14.2.1. What real brokers and sockets give stands in tests/real.
describe('the sentence for', () => {
  it.each([
    [1, /protocol version.*"5"/],
    [2, /client identifier/],
    [3, /not available at the moment/],
    [4, /user name or password is wrong/],
    [5, /not authorised/],
    [132, /protocol version.*"3\.1\.1"/],
    [133, /client identifier/],
    [134, /user name or password is wrong/],
    [135, /not authorised/],
    [138, /banned/],
    [159, /reason 159/],
  ])('CONNACK %d', (code, sentence) => {
    expect(say({ code })).toMatch(sentence);
    expect(say({ code })).toMatch(/^mqtt:\/\/host:1883 refuses the connection: .*\.$/);
  });

  it.each([
    ['ECONNREFUSED', /Nobody answers/],
    ['ENOTFOUND', /is not known/],
    ['EAI_AGAIN', /is not known/],
    ['ETIMEDOUT', /cannot be reached/],
    ['EHOSTUNREACH', /cannot be reached/],
    ['ECONNRESET', /has cut the connection/],
    ['CERT_HAS_EXPIRED', /not valid today/],
    ['CERT_NOT_YET_VALID', /set the clock/],
    ['SELF_SIGNED_CERT_IN_CHAIN', /trusted here/],
    ['ERR_SSL_WRONG_VERSION_NUMBER', /is it a TLS port/],
  ])('%s', (code, sentence) => {
    expect(say({ code })).toMatch(sentence);
  });

  it('what has no code', () => {
    expect(say({ message: 'connack timeout' })).toMatch(/has not answered in time/);
    expect(say({ message: 'Keepalive timeout' })).toMatch(/does not answer any more/);
    expect(say(new Error('odd'))).toBe('No connection to mqtt://host:1883: odd');
    expect(say({})).toMatch(/unknown reason/);
  });

  it('a good-bye', () => {
    expect(goodbye(0x8e, BROKER)).toMatch(/another client has taken over/);
    expect(goodbye(0x8b, BROKER)).toMatch(/shutting down/);
    expect(goodbye(0xff, BROKER)).toMatch(/reason 255/);
  });

  it('hostile text from the other side is fit for a screen', () => {
    const bad = '\u001b[2J\u0007'.repeat(100);
    for (const error of [{ message: bad }, { code: `ERR_SSL_${bad}` }, { code: 'ERR_TLS_CERT_ALTNAME_INVALID', reason: bad }]) {
      const sentence = say(error);
      expect(clean(sentence, 1000)).toBe(sentence);
      expect(sentence.length).toBeLessThan(400);
    }
  });
});
