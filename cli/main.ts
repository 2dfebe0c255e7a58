#!/usr/bin/env node
// The only file that sets an exit code.
import { createContext } from './context.js';
import { EXIT } from './exit-codes.js';
import { runProgram } from './program.js';

const leaveNow = (): never => process.exit(EXIT.stopped);
const { env, stdin, stdout, stderr } = process;
const context = createContext({ env, stdin, stdout, stderr, leaveNow });

process.on('SIGINT', () => context.interruption.interrupt());
// The terminal was closed, or somebody ends the process: the same safe end.
process.on('SIGTERM', () => context.interruption.end());
process.on('SIGHUP', () => context.interruption.end());
// Whoever read our output has enough: `refettle unit list | head`.
for (const stream of [stdout, stderr]) {
  stream.on('error', (error: NodeJS.ErrnoException) => {
    if (error.code !== 'EPIPE') throw error;
  });
}

const code = await runProgram(process.argv.slice(2), context);
// Ports and sockets that are still closing don't keep the shell waiting; what was written is flushed first.
stdout.write('', () => stderr.write('', () => process.exit(code)));
