import { repairBodySchema } from '../../shared/history/events.js';
import { verdictSchema } from '../../shared/verdict.js';
import type { Context } from '../context.js';
import { NobodyToAskError } from '../errors.js';
import type { Hands } from '../instruments/rig.js';
import { repairText } from '../render/repair-text.js';
import type { Technician } from './technician.js';

/** The technician of a simulated rig answers by the scenario; each answer is printed as theirs. */
export function simulatedTechnician({ stderr }: Context, hands: Hands): Technician {
  const answerOf = (stepId: string, kind: string, question: string): string => {
    const answer = hands.answer(stepId, kind);
    if (answer === undefined)
      throw new NobodyToAskError(question, `run it at a terminal, or give the scenario an answer to '${stepId}' or '${kind}'`);
    return answer;
  };
  const say = (answer: string): void => void stderr.write(`           > ${answer}  (simulated technician)\n`);
  return {
    attended: false,
    confirms(stepId, text) {
      const answer = answerOf(stepId, 'caution', text) === 'yes' ? 'yes' : 'no';
      say(answer);
      return Promise.resolve(answer);
    },
    hasDone(stepId, kind, question) {
      const done = ['done', 'yes'].includes(answerOf(stepId, kind, question));
      say(done ? 'done' : 'not done');
      return Promise.resolve(done);
    },
    looks(stepId, question) {
      const [verdict = '', ...note] = answerOf(stepId, 'inspect', question).split(', ');
      say([verdict, ...note].join(', '));
      const text = note.join(', ');
      return Promise.resolve({ verdict: verdictSchema.catch('inconclusive').parse(verdict), ...(text === '' ? {} : { note: text }) });
    },
    mended(stepId, { optional }) {
      const repair = hands.repairDetails(stepId);
      if (!repair && !optional) answerOf(stepId, 'repair', 'What was mended?');
      if (!repair) return Promise.resolve(undefined);
      say(repairText(repair));
      return Promise.resolve(repairBodySchema.parse(repair));
    },
    remarks(stepId, question) {
      const text = hands.answer(stepId, 'note') ?? '';
      say(text || question);
      return Promise.resolve(text);
    },
    reads: (stepId, { title }) =>
      Promise.reject(new NobodyToAskError(`No meter of this rig measures ${title}.`, `give the scenario a measurement for '${stepId}'`)),
    triesAgain: () => Promise.resolve(false),
  };
}
