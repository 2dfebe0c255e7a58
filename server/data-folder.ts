import { createHash } from 'node:crypto';
import { chmodSync, existsSync, mkdirSync, realpathSync } from 'node:fs';
import { connect, createServer, type Server } from 'node:net';
import { text } from 'node:stream/consumers';
import { SetUpError } from './set-up-error.js';

/** As root, the user that PostgreSQL runs as must pass through (without listing); everything in it has a mode of its own. */
const folderMode = process.getuid?.() === 0 ? 0o711 : 0o700;

export function makeDataFolder(dataDir: string): void {
  if (existsSync(dataDir)) return;
  try {
    mkdirSync(dataDir, { recursive: true });
    chmodSync(dataDir, folderMode);
  } catch (cause) {
    throw new SetUpError(
      `The data folder ${dataDir} can't be made.`,
      'Name a folder where you may write: REFETTLE_DATA=/path/to/folder npm start.',
      { cause },
    );
  }
}

/**
 * One server a data folder. The hold is a socket without a file (Linux's abstract name space): the kernel takes it away with the process,
 * so that nothing stale is left after a kill. Whoever finds it held is told by whom.
 */
export async function holdDataFolder(dataDir: string): Promise<{ release(): void }> {
  const name = `\0refettle-${createHash('sha256').update(realpathSync(dataDir)).digest('hex').slice(0, 32)}`;
  const hold = createServer((asker) => asker.on('error', () => undefined).end(process.pid.toString()));
  try {
    await listening(hold, name);
  } catch (cause) {
    if ((cause as NodeJS.ErrnoException).code !== 'EADDRINUSE') throw cause;
    throw new SetUpError(
      `Another Refettle (process ${await text(connect(name)).catch(() => 'unknown')}) already works in ${dataDir}.`,
      'Use that one, or end it first, or name another data folder: REFETTLE_DATA=/path/to/folder npm start.',
      { cause },
    );
  }
  hold.unref();
  return { release: () => void hold.close() };
}

function listening(server: Server, name: string): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once('error', reject).listen(name, resolve);
  });
}
