// A whole server as a process of its own, on a database that is there already.
import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';

export interface ServerProcess {
  port: number;
  /** As the machine does it when its plug is pulled. */
  kill(): Promise<void>;
  /** Ctrl-C; answers the exit code. */
  stop(): Promise<number | null>;
  remove(): Promise<void>;
}

async function freePort(): Promise<number> {
  const probe = createServer();
  await new Promise<void>((listening) => probe.listen(0, '127.0.0.1', listening));
  const { port } = probe.address() as AddressInfo;
  await new Promise((closed) => probe.close(closed));
  return port;
}

/** As npm test has just built it, otherwise from the sources. */
const builtCli = process.env['REFETTLE_TEST_PROGRAM'];
const builtServer = builtCli === undefined ? undefined : join(dirname(builtCli), '../server/main.js');
const program = builtServer !== undefined && existsSync(builtServer) ? [builtServer] : ['--import', 'tsx', 'server/main.ts'];

export async function startServerProcess(databaseUrl: string, publicUrl: string): Promise<ServerProcess> {
  const dataDir = mkdtempSync(join(tmpdir(), 'refettle-server-'));
  const port = await freePort();
  const child = spawn(process.execPath, program, {
    cwd: new URL('../..', import.meta.url),
    env: {
      PATH: process.env['PATH'],
      LANG: 'C.UTF-8',
      HOST: '127.0.0.1',
      PORT: String(port),
      REFETTLE_DATA: dataDir,
      REFETTLE_DEMO: '0',
      REFETTLE_PUBLIC_URL: publicUrl,
      DATABASE_URL: databaseUrl,
    },
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  let said = '';
  child.stdout.on('data', (piece: Buffer) => (said += piece.toString()));
  child.stderr.on('data', (piece: Buffer) => (said += piece.toString()));
  const ended = once(child, 'exit') as Promise<[number | null]>;
  let over = false;
  void ended.then(() => (over = true));
  const address = `http://127.0.0.1:${String(port)}`;
  for (let tries = 0; ; tries += 1) {
    if (over) throw new Error(`The server ended: ${said}`);
    const answers = await fetch(`${address}/api/health`).then(
      ({ status }) => status === 200,
      () => false,
    );
    if (answers) break;
    if (tries > 600) throw new Error(`The server does not answer: ${said}`);
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
  const end = async (signal: NodeJS.Signals): Promise<number | null> => {
    if (!over) child.kill(signal);
    return (await ended)[0];
  };
  return {
    port,
    kill: async () => void (await end('SIGKILL')),
    stop: () => end('SIGINT'),
    async remove() {
      await end('SIGKILL');
      rmSync(dataDir, { recursive: true, force: true });
    },
  };
}
