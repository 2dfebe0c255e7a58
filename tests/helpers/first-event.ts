// A stream has no end: a test that asks for it as for any route takes its first event and leaves.
import type { IncomingMessage } from 'node:http';

/** A parser for supertest: the data of the first server-sent event, or the whole answer where it is a problem. */
export function firstEvent(response: IncomingMessage & { text?: string }, done: (error: Error | null, body: unknown) => void): void {
  const isStream = response.headers['content-type']?.startsWith('text/event-stream') === true;
  let text = '';
  let found = false;
  response.setEncoding('utf8');
  response.on('data', (piece: string) => {
    text += piece;
    const data = isStream && !found ? /^data: (.+)\n\n/m.exec(text)?.[1] : undefined;
    if (data === undefined) return;
    found = true;
    response.text = text;
    done(null, JSON.parse(data));
    response.destroy();
  });
  response.on('end', () => {
    if (found) return;
    response.text = text;
    done(null, JSON.parse(text));
  });
}
