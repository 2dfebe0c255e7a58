// Loaded by transport.ts only, and only when a port is opened.
import { read } from 'node:fs';
import { promisify } from 'node:util';
import { autoDetect, LinuxBinding } from '@serialport/bindings-cpp';
import { unixRead } from '@serialport/bindings-cpp/dist/unix-read.js';

const readAsync = promisify(read);

// serialport 13 on Linux: after a hang-up read() gives 0 bytes for ever; the binding retries at 100 % CPU and never says 'close'.
// A port is opened with vmin 1, so "no data yet" is EAGAIN, and 0 bytes can only be a hang-up: say so in the binding's own way.
const readOrHangUp = (async (fd: number, buffer: Buffer, offset: number, length: number, position: number | null) => {
  const got = await readAsync(fd, buffer, offset, length, position);
  if (got.bytesRead === 0) throw Object.assign(new Error('the device is gone'), { code: 'EBADF' });
  return got;
}) as typeof readAsync;

const linuxDriver: typeof LinuxBinding = {
  ...LinuxBinding,
  async open(options) {
    const port = await LinuxBinding.open(options);
    port.read = (buffer, offset, length) => unixRead({ binding: port, buffer, offset, length, fsReadAsync: readOrHangUp });
    return port;
  },
};

export const serialDriver = process.platform === 'linux' ? linuxDriver : autoDetect();
