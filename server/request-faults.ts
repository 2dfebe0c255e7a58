import type { z } from 'zod';
import { InvalidError, type Fault } from './errors.js';

/** RFC 6901, section 3. */
const token = (part: PropertyKey): string => `/${String(part).replaceAll('~', '~0').replaceAll('/', '~1')}`;

const pointerTo = (path: readonly PropertyKey[], below = ''): string => below + path.map(token).join('');

/** A request may be wrong in thousands of places; nobody reads more than these. */
const FAULTS_AT_MOST = 50;

/** zod says it in its own words where the schema has none; these two are what people meet. */
function reasonOf(issue: z.core.$ZodIssue): string {
  if (issue.code === 'invalid_type' && / received undefined$/.test(issue.message)) return 'is missing';
  if (issue.code === 'invalid_value' && issue.message.startsWith('Invalid')) return `is none of: ${issue.values.map(String).join(', ')}`;
  return issue.message;
}

/** What zod finds, as pointers and reasons. A member that is not known is named itself, and not only the object it stands in. */
export function faultsOf(error: z.ZodError, below: string): Fault[] {
  return error.issues
    .flatMap((issue): Fault[] => {
      if (issue.code === 'unrecognized_keys')
        return issue.keys.map((key) => ({ pointer: pointerTo([...issue.path, key], below), reason: 'is not known here' }));
      return [{ pointer: pointerTo(issue.path, below), reason: reasonOf(issue) }];
    })
    .slice(0, FAULTS_AT_MOST);
}

/** A NUL, or half of a surrogate pair: no text, and nothing that PostgreSQL keeps. */
const NO_TEXT = /[\0\p{Surrogate}]/u;
const DEPTH_AT_MOST = 64;

/** Where the request holds strings that are no text, or is nested deeper than anything of ours. */
export function textFaults(value: unknown, at: string, depth = 0): Fault[] {
  if (typeof value === 'string') return NO_TEXT.test(value) ? [{ pointer: at, reason: 'holds a character that is no text' }] : [];
  if (typeof value !== 'object' || value === null) return [];
  if (depth > DEPTH_AT_MOST) return [{ pointer: at, reason: 'is nested too deep' }];
  const faults: Fault[] = [];
  for (const [key, inner] of Object.entries(value)) {
    if (NO_TEXT.test(key)) faults.push({ pointer: at, reason: 'holds a name that is no text' });
    else faults.push(...textFaults(inner, at + token(key), depth + 1));
    if (faults.length >= FAULTS_AT_MOST) break;
  }
  return faults;
}

/** The same for what was made out of a request's text by a parser that knows escapes of its own. */
export function refuseWhatIsNoText(value: unknown, pointer: string): void {
  const first = textFaults(value, '')[0];
  if (first) throw new InvalidError([{ pointer, reason: `${first.pointer} ${first.reason}` }]);
}
