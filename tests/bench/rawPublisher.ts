import { once } from 'node:events';
import { connect } from 'node:net';
import { argv } from 'node:process';

/** What a raw publisher is told: as the arguments of its process. */
export interface RawPublishing {
  readonly port: number;
  readonly qos: 0 | 1;
  /** Messages go round these topics: `bench/0`, `bench/1`, and so on. */
  readonly topics: number;
  readonly json: boolean;
  readonly messages: number;
}

const BLOCK = 1000; // messages a write
const AHEAD = 20_000; // messages that may be under way: enough to keep the subscriber busy, few enough to be held by the broker

/** Bytes of one PUBLISH packet: MQTT 3.1.1, section 3.3. */
function publishPacket(topic: string, payload: string, qos: 0 | 1, id: number): Buffer {
  const [t, p] = [Buffer.from(topic), Buffer.from(payload)];
  let length = 2 + t.length + (qos ? 2 : 0) + p.length;
  const head = [0x30 | (qos << 1)];
  do {
    const more = length > 127 ? 128 : 0;
    head.push((length % 128) | more);
    length = Math.floor(length / 128);
  } while (length > 0);
  return Buffer.concat([Buffer.from(head), Buffer.from([t.length >> 8, t.length & 255]), t, Buffer.from(qos ? [id >> 8, id & 255] : []), p]);
}

/** Value of message i. */
const valueAt = (i: number): number => Number((41.2 + Math.sin(i * 1.7) / 4).toFixed(3));

/**
 * A publisher that costs next to nothing: packets made beforehand, written in blocks, as fast as the subscriber says (over
 * the process's channel, by the number of messages it has) that it takes them. So nothing is lost and nobody else is measured.
 */
async function publish({ port, qos, topics, json, messages }: RawPublishing): Promise<void> {
  const payload = (i: number): string => (json ? JSON.stringify({ value: valueAt(i), unit: 'L/min' }) : String(valueAt(i)));
  const block = Buffer.concat(Array.from({ length: BLOCK }, (_, i) => publishPacket(`bench/${i % topics}`, payload(i), qos, i + 1)));
  const socket = connect(port, '127.0.0.1').setNoDelay();
  const id = Buffer.from('raw');
  socket.write(Buffer.concat([Buffer.from([0x10, 12 + id.length, 0, 4]), Buffer.from('MQTT'), Buffer.from([4, 2, 0, 0, 0, id.length]), id]));
  await once(socket, 'data');
  socket.resume(); // acknowledgements are let go by
  let sent = 0;
  let taken = 0;
  const pump = (): void => {
    while (sent < messages && sent - taken < AHEAD) {
      socket.write(block);
      sent += BLOCK;
    }
  };
  process.on('message', (count: number) => {
    taken = count;
    pump();
  });
  process.on('disconnect', () => process.exit());
  pump();
}

if (argv[1] === import.meta.filename) await publish(JSON.parse(argv[2]!) as RawPublishing);
