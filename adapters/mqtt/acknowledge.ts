import type { MqttClient } from 'mqtt';

const MOST_PENDING = 65_535; // packet identifiers of MQTT: a broker cannot have more messages under way

/**
 * Acknowledges QoS 1 messages only after what they led to is durable. mqtt.js acknowledges when its handler calls back,
 * and reads no further packet before that, pings included; so the handler calls back at once with an error, which
 * withholds the PUBACK, and it is sent from here, for all that came meanwhile together. That uses a method of mqtt.js
 * which is not public: the version is pinned, and tests/real/mqttDurable.test.ts proves it on a real broker.
 */
export class Acknowledger {
  private waiting: number[] = [];
  private busy = false;
  private connection = 0;

  /** @param onFailed what was received could not be made durable: nothing is acknowledged, so that the broker sends it again */
  constructor(
    private readonly client: MqttClient,
    private readonly durable: () => Promise<void>,
    private readonly onFailed: () => void,
  ) {}

  /** Whether anything waits for its acknowledgement. */
  get isPending(): boolean {
    return this.busy || this.waiting.length > 0;
  }

  add(messageId: number): void {
    if (this.waiting.length < MOST_PENDING) this.waiting.push(messageId);
    if (!this.busy) void this.flush();
  }

  /** The connection has gone: what was not acknowledged comes again on the next one. */
  drop(): void {
    this.connection++;
    this.waiting = [];
  }

  private async flush(): Promise<void> {
    this.busy = true;
    while (this.waiting.length > 0) {
      const { connection } = this;
      const batch = this.waiting;
      this.waiting = [];
      const stored = await this.durable().then(
        () => true,
        () => false,
      );
      if (connection !== this.connection) continue;
      if (stored) this.send(batch);
      else {
        this.drop();
        this.onFailed();
      }
    }
    this.busy = false;
  }

  private send(messageIds: readonly number[]): void {
    if (!this.client.connected) return;
    const inner = this.client as unknown as { _sendPacket(packet: object): void };
    const { stream } = this.client;
    stream.cork(); // one write to the socket for all of them
    for (const messageId of messageIds) inner._sendPacket({ cmd: 'puback', messageId, reasonCode: 0 });
    stream.uncork();
  }
}
