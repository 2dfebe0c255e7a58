// Hears server-sent events as a browser does (WHATWG HTML, section 9.2), and keeps count.
import { get, type IncomingMessage } from 'node:http';
import { LIVE_BEAT, liveEventSchema, type LiveEvent } from '../../shared/api/live.js';

export interface Heard {
  id: string | undefined;
  event: LiveEvent;
}

export interface LiveClient {
  readonly heard: readonly Heard[];
  /** What the browser would send as Last-Event-ID. */
  readonly lastId: string | undefined;
  /** The stream is open. */
  readonly open: boolean;
  /** Resolves when the server's answer is none that begins a stream: its status. */
  refusal(): Promise<number>;
  /** Resolves as soon as something heard fits; what was heard before counts, too. */
  until(fits: (heard: Heard) => boolean): Promise<Heard>;
  /** Cuts the connection, as a network does. */
  cut(): void;
  /** Connects, or connects again where it was. */
  connect(): void;
  /** Resolves when the server has ended the stream or the connection broke. */
  ended(): Promise<void>;
}

export function liveClient(address: string, token: string, query = ''): LiveClient {
  const heard: Heard[] = [];
  const waiting = new Set<() => void>();
  let lastId: string | undefined;
  let response: IncomingMessage | undefined;
  let cutOff = (): void => undefined;
  let refused: number | undefined;
  const wake = (): void => {
    for (const look of [...waiting]) look();
  };

  const take = (block: string): void => {
    const fields = block.split('\n').map((line) => /^([^:]+): ?(.*)$/.exec(line));
    const field = (name: string): string | undefined => fields.find((one) => one?.[1] === name)?.[2];
    const id = field('id');
    if (id !== undefined) lastId = id;
    const data = field('data');
    if (data !== undefined && field('event') !== LIVE_BEAT) heard.push({ id, event: liveEventSchema.parse(JSON.parse(data)) });
  };

  const connect = (): void => {
    let text = '';
    const request = get(
      `${address}/api/live${query}`,
      {
        agent: false,
        headers: {
          authorization: `Bearer ${token}`,
          accept: 'text/event-stream',
          ...(lastId === undefined ? {} : { 'last-event-id': lastId }),
        },
      },
      (answer) => {
        if (answer.statusCode !== 200) {
          refused = answer.statusCode;
          answer.resume();
          wake();
          return;
        }
        response = answer;
        answer.setEncoding('utf8');
        answer.on('data', (piece: string) => {
          text += piece;
          const blocks = text.split('\n\n');
          text = blocks.pop() ?? '';
          blocks.forEach(take);
          wake();
        });
        answer.on('error', () => undefined);
        answer.on('close', () => {
          if (response === answer) response = undefined;
          wake();
        });
        wake();
      },
    );
    request.on('error', wake);
    cutOff = () => request.destroy();
  };
  connect();

  const until = <T>(look: () => T | undefined): Promise<T> =>
    new Promise((resolve) => {
      const again = (): void => {
        const found = look();
        if (found === undefined) return;
        waiting.delete(again);
        resolve(found);
      };
      waiting.add(again);
      again();
    });
  return {
    heard,
    get lastId() {
      return lastId;
    },
    get open() {
      return response !== undefined;
    },
    refusal: () => until(() => refused),
    until: (fits) => until(() => heard.find(fits)),
    cut: () => cutOff(),
    connect,
    ended: () => until(() => (response === undefined ? true : undefined)).then(() => undefined),
  };
}
