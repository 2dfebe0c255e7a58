import { useRef } from 'react';
import { v7 as uuid } from 'uuid';

export interface Submission {
  idempotencyKey: string;
  id: string;
  at: string;
}

/**
 * One key for one piece of work: sent again unchanged (the network broke, a button was pressed twice) it is stored once.
 * What was changed in between is new work and gets a new key.
 */
export function useSubmission(): (work: unknown) => Submission {
  const last = useRef<{ work: string; submission: Submission } | undefined>(undefined);
  return (work) => {
    const text = JSON.stringify(work);
    if (last.current?.work !== text) {
      last.current = { work: text, submission: { idempotencyKey: uuid(), id: uuid(), at: new Date().toISOString() } };
    }
    return last.current.submission;
  };
}
