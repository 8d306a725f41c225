import type { MqttClient } from 'mqtt';

const MOST_PENDING = 65_535; // packet identifiers of MQTT: a broker cannot have more messages under way

/**
 * Acknowledges QoS 1 messages only after what they led to is durable. mqtt.js acknowledges when its handler calls back,
 * and reads no further packet before that, pings included; so the handler calls back at once with an error, which
 * withholds the PUBACK, and it is sent from here. That uses a method of mqtt.js which is not public: the version is
 * pinned, and tests/real/mqttAcknowledge.test.ts proves it on a real broker.
 */
export class Acknowledger {
  private waiting: number[] = [];
  private busy = false;
  private session = 0;

  /** @param onFailed what was received could not be made durable: nothing is acknowledged, so that the broker sends it again */
  constructor(
    private readonly client: MqttClient,
    private readonly durable: () => Promise<void>,
    private readonly onFailed: () => void,
  ) {}

  get pending(): number {
    return this.waiting.length + (this.busy ? 1 : 0);
  }

  add(messageId: number): void {
    if (this.waiting.length < MOST_PENDING) this.waiting.push(messageId);
    if (!this.busy) void this.flush();
  }

  /** The connection has gone: what was not acknowledged comes again, under numbers of its own. */
  drop(): void {
    this.session++;
    this.waiting = [];
  }

  private async flush(): Promise<void> {
    this.busy = true;
    try {
      while (this.waiting.length > 0) {
        const { session } = this;
        const batch = this.waiting;
        this.waiting = [];
        await this.durable();
        if (session !== this.session || !this.client.connected) continue;
        const inner = this.client as unknown as { _sendPacket(packet: object): void };
        for (const messageId of batch) inner._sendPacket({ cmd: 'puback', messageId, reasonCode: 0 });
      }
    } catch {
      this.drop();
      this.onFailed();
    } finally {
      this.busy = false;
    }
  }
}
