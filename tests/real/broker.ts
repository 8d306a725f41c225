import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { connect as connectSocket, createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import mqtt, { type MqttClient } from 'mqtt';

/** What a broker under test is to be like, beside listening on the loopback interface. */
export interface BrokerSettings {
  /** Further lines of its configuration; FOLDER stands for its folder. */
  readonly lines?: readonly string[];
  /** Files in its folder, by name. */
  readonly files?: Readonly<Record<string, string>>;
  /** Whether those without a name may connect; true. */
  readonly anonymous?: boolean;
}

/** A real mosquitto in a folder of its own, on a port that was free. It keeps sessions and messages on disk, and may be killed and started again. */
export class Broker {
  readonly folder = mkdtempSync(join(tmpdir(), 'kilter-broker-'));
  private process: ChildProcess | null = null;
  private said = '';

  private constructor(readonly port: number) {}

  static async start({ lines = [], files = {}, anonymous = true }: BrokerSettings = {}): Promise<Broker> {
    const broker = new Broker(await freePort());
    const { folder, port } = broker;
    for (const [name, content] of Object.entries(files)) writeFileSync(join(folder, name), content, { mode: 0o600 });
    const configuration = [
      `listener ${port} 127.0.0.1`,
      `allow_anonymous ${anonymous}`,
      ...(process.getuid?.() === 0 ? ['user root'] : []), // else it would drop to a user who may not read the folder
      'persistence true',
      `persistence_location ${folder}/`,
      'autosave_on_changes true', // a killed broker has what it acknowledged
      'autosave_interval 1',
      'max_queued_messages 0',
      'log_dest stderr',
      ...lines.map((line) => line.replaceAll('FOLDER', folder)),
    ];
    writeFileSync(join(folder, 'mosquitto.conf'), configuration.join('\n') + '\n');
    await broker.start();
    return broker;
  }

  get url(): string {
    return `mqtt://127.0.0.1:${this.port}`;
  }

  async start(): Promise<void> {
    const child = spawn('mosquitto', ['-c', join(this.folder, 'mosquitto.conf')], { stdio: ['ignore', 'ignore', 'pipe'] });
    child.on('error', (error) => (this.said += String(error)));
    child.stderr.on('data', (chunk: Buffer) => (this.said = (this.said + chunk.toString()).slice(-100_000)));
    this.process = child;
    for (let tries = 0; !(await answers(this.port)); tries++) {
      if (tries > 500 || child.exitCode !== null) throw new Error(`mosquitto does not start:\n${this.said}`);
      await sleep(10);
    }
  }

  /** Ends it as a power cut would. */
  async kill(): Promise<void> {
    const child = this.process;
    this.process = null;
    if (!child || child.exitCode !== null || child.signalCode !== null) return;
    const gone = once(child, 'exit');
    child.kill('SIGKILL');
    await gone;
  }

  /** Freezes it: connections stay open, nothing answers. */
  pause(): void {
    this.process?.kill('SIGSTOP');
  }

  proceed(): void {
    this.process?.kill('SIGCONT');
  }

  async dispose(): Promise<void> {
    await this.kill();
    rmSync(this.folder, { recursive: true, force: true });
  }

  /** A client that publishes; to be ended by the caller. */
  publisher(): Promise<MqttClient> {
    return mqtt.connectAsync(this.url, { reconnectPeriod: 50, clientId: `publisher${this.port}` });
  }
}

/** A port of the loopback interface that nobody uses at the moment. */
export async function freePort(): Promise<number> {
  const server = createServer().listen(0, '127.0.0.1');
  await once(server, 'listening');
  const { port } = server.address() as AddressInfo;
  server.close();
  await once(server, 'close');
  return port;
}

function answers(port: number): Promise<boolean> {
  return new Promise((resolve) => {
    const socket = connectSocket(port, '127.0.0.1', () => {
      socket.destroy();
      resolve(true);
    });
    socket.on('error', () => resolve(false));
  });
}
