import { HERON_CABLES } from './heron-cables.js';
import { HERON_FLAKY } from './heron-flaky.js';
import { HERON_GOOD } from './heron-good.js';
import { HERON_MEND } from './heron-mend.js';

/** The scenarios that come with the program, as text: they are in the built program too, where no YAML file is. */
export const BUILT_IN_SCENARIOS: Readonly<Record<string, string>> = {
  'heron-mend': HERON_MEND,
  'heron-good': HERON_GOOD,
  'heron-flaky': HERON_FLAKY,
  'heron-cables': HERON_CABLES,
};
