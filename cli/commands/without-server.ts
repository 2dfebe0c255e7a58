import type { Context } from '../context.js';
import { runDecode, type DecodeOptions } from './decode.js';
import { runJudge, type JudgeOptions } from './judge.js';

// These two need no server, no sign-in and nobody at a terminal: all they get is where to write. JSON is written as it is.
const streamsFor = (json: boolean | undefined, { stdout, stderr }: Context) => ({
  stdout: { write: (text: string): void => (json === true ? stdout.writeExactly(text) : stdout.write(text)) },
  stderr: { write: (text: string): void => stderr.write(text) },
});

export const decodeInContext = (options: DecodeOptions, context: Context): Promise<number> =>
  runDecode(options, streamsFor(options.json, context));
export const judgeInContext = (options: JudgeOptions, context: Context): Promise<number> =>
  runJudge(options, streamsFor(options.json, context));
