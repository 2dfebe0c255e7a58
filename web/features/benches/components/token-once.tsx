import { useEffect, useRef, useState } from 'react';

/** A bench's token, the one time that it is shown. */
export function TokenOnce({ bench, token, onDone }: { bench: string; token: string; onDone: () => void }) {
  const box = useRef<HTMLDivElement>(null);
  const [copied, setCopied] = useState(false);
  useEffect(() => box.current?.focus(), [token]);
  // Over plain http on a network name browsers offer no clipboard.
  const mayCopy = typeof navigator.clipboard === 'object';
  return (
    <div ref={box} role="status" tabIndex={-1} className="my-4 border-2 border-ink bg-sheet px-4 py-3">
      <p className="font-bold">The token of {bench}. It is shown now and never again.</p>
      <p className="my-2 font-mono break-all select-all">{token}</p>
      <p>
        On the bench’s computer: <span className="font-mono">refettle bench join</span>, and paste it where it is asked for. Whoever has it
        can send work in the name of everybody who signs on there, so it goes nowhere else.
      </p>
      <div className="mt-3 flex flex-wrap gap-3">
        {mayCopy && (
          <button
            type="button"
            className="button button-plain"
            onClick={() => void navigator.clipboard.writeText(token).then(() => setCopied(true))}
          >
            {copied ? 'Copied' : 'Copy the token'}
          </button>
        )}
        <button type="button" className="button button-plain" onClick={onDone}>
          I have it, hide it
        </button>
      </div>
    </div>
  );
}
