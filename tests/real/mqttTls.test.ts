import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { MqttOptions } from '../../adapters/options.js';
import type { Source } from '../../adapters/source.js';
import { UserError } from '../../src/text/errors.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { authorityIn, type Authority } from './authority.js';
import { Broker } from './broker.js';

// Certificates made by openssl, a real mosquitto that shows them.

describe('TLS', () => {
  const folder = mkdtempSync(join(tmpdir(), 'kilter-tls-'));
  let works: Authority;
  let strangers: Authority;
  let broker: Broker;
  let source: Source | null = null;

  beforeAll(() => {
    works = authorityIn(folder, 'works');
    strangers = authorityIn(folder, 'strangers');
  });
  afterEach(async () => {
    await source?.stop();
    source = null;
    await broker.dispose();
  });
  afterAll(() => rmSync(folder, { recursive: true }));

  const start = async (hosts: string, ...lines: string[]): Promise<void> => {
    const { cert, key } = works.issue(`broker-${hosts.replace(/\W/g, '-')}`, hosts);
    broker = await Broker.start({ lines: [`certfile ${cert}`, `keyfile ${key}`, ...lines] });
  };
  const connect = (more: Partial<MqttOptions>): RecordingSink => {
    const sink = new RecordingSink();
    source = mqttSource('bus', atBroker(`mqtts://127.0.0.1:${broker.port}`, more), [wantedOn('cell/flow')]);
    source.start(sink);
    return sink;
  };
  const told = async (sink: RecordingSink, what: RegExp): Promise<void> => {
    await until(() => sink.phases.some(({ sentence }) => what.test(sentence)), `${what} is told`).catch((error: unknown) => {
      throw new Error(`${String(error)}\n${sink.phases.map(({ sentence }) => sentence).join('\n')}`);
    });
    expect(sink.phases.some(({ phase }) => phase === 'open')).toBe(false);
  };

  it.each(['3.1.1', '5'] as const)('is spoken with a broker whose authority was given, MQTT %s', async (protocol) => {
    await start('IP:127.0.0.1');
    const sink = connect({ ca: works.ca, protocol });
    await until(() => sink.is('open'), 'it is connected');
    expect(sink.phases.at(-1)!.sentence).toContain('mqtts://127.0.0.1');
  });

  it('is refused to a broker of another authority', async () => {
    await start('IP:127.0.0.1');
    await told(connect({ ca: strangers.ca }), /not signed by an authority that is trusted here: give the right one with 'ca:'/);
  });

  it('is refused to a broker whose authority this machine does not know', async () => {
    await start('IP:127.0.0.1');
    await told(connect({}), /not signed by an authority that is trusted here/);
  });

  it('is refused to a broker whose certificate is for another name', async () => {
    await start('DNS:elsewhere.example');
    await told(connect({ ca: works.ca }), /made out to another name/);
  });

  it('says so where the port speaks none', async () => {
    broker = await Broker.start();
    await told(connect({ ca: works.ca }), /has cut the connection|TLS with .* fails/);
  });

  it('brings a certificate of the client to a broker that asks for it', async () => {
    await start('IP:127.0.0.1', `cafile ${works.ca}`, 'require_certificate true');
    const sink = connect({ ca: works.ca, ...works.issue('kilter') });
    await until(() => sink.is('open'), 'it is connected');
  });

  it('says so where the broker asks for one and none is given', async () => {
    await start('IP:127.0.0.1', `cafile ${works.ca}`, 'require_certificate true');
    await told(connect({ ca: works.ca }), /asks for a certificate of this client/);
  });

  it('cannot be had with files that fit nothing, and that is said before anything runs', async () => {
    await start('IP:127.0.0.1');
    const junk = join(folder, 'junk.pem');
    writeFileSync(junk, '-----BEGIN CERTIFICATE-----\nAAAA\n-----END CERTIFICATE-----\n');
    const { cert, key } = works.issue('one');
    const other = works.issue('other');
    expect(() => connect({ ca: works.ca, cert: junk, key })).toThrow(UserError);
    expect(() => connect({ ca: works.ca, cert, key: other.key })).toThrow(/must belong to its certificate/);
    expect(() => connect({ ca: join(folder, 'absent.pem') })).toThrow(/absent\.pem, is not there/);
    expect(() => connect({ ca: folder })).toThrow(/is a folder/);
    expect(() => connect({ ca: works.ca, cert })).toThrow(/only one/);
    expect(() => connect({ url: 'mqtt://127.0.0.1', ca: works.ca })).toThrow(/without TLS/);
  });
});
