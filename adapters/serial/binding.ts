import { read } from 'node:fs';
import { promisify } from 'node:util';
import type {
  BindingInterface,
  BindingPortInterface,
  OpenOptions,
} from '@serialport/bindings-interface' with { 'resolution-mode': 'require' };
import { SerialPort } from 'serialport';

/** What the Linux port has beside its interface. */
type LinuxPort = BindingPortInterface & {
  readonly fd: number | null;
  readonly poller: { once(event: 'readable', done: (error: Error | null) => void): void };
};

const readFd = promisify(read);
const native = SerialPort.binding as unknown as BindingInterface;

/**
 * serialport's own binding, save that a read of 0 bytes is a hang-up. The original tries again for ever when a line
 * is unplugged while it streams: no event comes, the port stays open, and one core is busy (bindings-cpp issue 162).
 */
export const hangUpBinding: BindingInterface = {
  list: () => native.list(),
  async open(options: OpenOptions) {
    const port = await native.open(options);
    if (isLinux(port)) port.read = (buffer, offset, length) => readOrHangUp(port, buffer, offset, length);
    return port;
  },
};

async function readOrHangUp(port: LinuxPort, buffer: Buffer, offset: number, length: number): Promise<{ bytesRead: number; buffer: Buffer }> {
  for (;;) {
    if (port.fd === null) throw cancelled();
    try {
      const { bytesRead } = await readFd(port.fd, buffer, offset, length, null);
      if (bytesRead === 0) throw Object.assign(new Error('the line hung up'), { disconnect: true });
      return { bytesRead, buffer };
    } catch (error) {
      if (!port.isOpen) throw cancelled();
      const { code } = error as NodeJS.ErrnoException;
      if (code !== 'EAGAIN' && code !== 'EINTR') throw Object.assign(error as Error, { disconnect: true });
      await new Promise<void>((resolve, reject) => port.poller.once('readable', (failed) => (failed ? reject(failed) : resolve())));
    }
  }
}

/** serialport closes quietly on an error that says so. */
function cancelled(): Error {
  return Object.assign(new Error('The port was closed'), { canceled: true });
}

function isLinux(port: BindingPortInterface): port is LinuxPort {
  return process.platform === 'linux' && 'fd' in port && 'poller' in port;
}
