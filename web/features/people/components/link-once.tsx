import { useEffect, useRef, useState } from 'react';
import type { MadeLink } from '../../../../shared/api/people.js';
import { formatDayTime } from '../../../lib/format.js';

/** A one-time link, the one time that it is shown. */
export function LinkOnce({ made: { person, link }, onDone }: { made: MadeLink; onDone: () => void }) {
  const box = useRef<HTMLDivElement>(null);
  const field = useRef<HTMLInputElement>(null);
  const [copied, setCopied] = useState(false);
  useEffect(() => {
    setCopied(false);
    box.current?.focus();
  }, [link.url]);
  const copy = async (): Promise<void> => {
    field.current?.select();
    // Over plain http on a name of the network browsers offer no clipboard; the old way still works there.
    const byClipboard = async (): Promise<boolean> => {
      if (typeof navigator.clipboard !== 'object') return false;
      return navigator.clipboard.writeText(link.url).then(
        () => true,
        () => false,
      );
    };
    setCopied((await byClipboard()) || document.execCommand('copy'));
  };
  return (
    <div ref={box} role="status" tabIndex={-1} className="my-4 border-2 border-ink bg-sheet px-4 py-3">
      <p className="font-bold">
        {link.kind === 'invitation' ? `The invitation of ${person.name}.` : `A link for ${person.name} to set a new password.`} It is shown
        now and never again.
      </p>
      <label className="sr-only" htmlFor="one-time-link">
        One-time link
      </label>
      <input ref={field} id="one-time-link" className="field my-2" readOnly value={link.url} onFocus={(event) => event.target.select()} />
      <p>
        It works once, until {formatDayTime(link.expiresAt)}. Hand it over yourself: whoever has it is let in as {person.name}.
        {link.kind === 'reset' && ' Until it is used the old password is good.'}
      </p>
      {link.onlyHere && (
        <p className="mt-2 font-bold">
          This address opens only on this computer. Open Refettle by its name on the network and make the link again for anybody elsewhere.
        </p>
      )}
      <div className="mt-3 flex flex-wrap gap-3">
        <button type="button" className="button button-plain" onClick={() => void copy()}>
          {copied ? 'Copied' : 'Copy the link'}
        </button>
        <button type="button" className="button button-plain" onClick={onDone}>
          I have it, hide it
        </button>
      </div>
    </div>
  );
}
