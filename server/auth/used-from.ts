import Bowser from 'bowser';
import type { Request } from 'express';

/** How our own terminal calls itself (cli/api/api-client.ts). */
const TERMINAL = /^refettle-terminal(?: \(([\w.-]{1,63})\))?$/;
const AGENT_LENGTH_AT_MOST = 500;

/** What a session is known by in a list, so that its owner knows it again: the terminal and its machine, or the kind of browser. */
export function usedFrom(request: Request): string {
  const agent = (request.get('user-agent') ?? '').slice(0, AGENT_LENGTH_AT_MOST);
  const terminal = TERMINAL.exec(agent);
  if (terminal) return terminal[1] === undefined ? 'terminal' : `terminal on ${terminal[1]}`;
  if (agent === '') return 'a program';
  const { browser, os } = Bowser.parse(agent);
  if (browser.name === undefined || os.name === undefined) return 'a program';
  return `${browser.name} on ${os.name}`;
}
