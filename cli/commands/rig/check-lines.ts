import type { PortAnswer } from '../../instruments/ask-port.js';
import type { Style } from '../../output.js';
import { wrap } from '../../render/columns.js';
import { plural } from '../../render/words.js';
import type { Found, Matched } from './match-instruments.js';

interface Checked {
  answers: readonly PortAnswer[];
  matched: Matched;
  /** The rig file, where there is one. */
  file: string | undefined;
}

/** What each port answered, or why not; then what the rig file names and nobody found. */
export function checkLines({ answers, matched, file }: Checked, style: Style): string[] {
  const { ink } = style;
  const lines = answers.flatMap((answer) => {
    if (answer.state !== 'answers')
      return [ink.bold(answer.port), ...under(`${answer.state}: ${answer.why}`, style), ...under(answer.toDo, style)];
    const found = matched.found.find((one) => one.answer === answer);
    const unclear = matched.unclear.find((one) => one.answer === answer);
    const sensors = answer.sensorCount === undefined ? [] : [plural(answer.sensorCount, 'sensor')];
    return [
      ink.bold(answer.port),
      `  ${answer.identification}, ${[...sensors, `${answer.baudRate} baud`].join(', ')}`,
      ...(found === undefined ? [] : [`  ${standingText(found, file !== undefined)}`]),
      ...(unclear === undefined
        ? []
        : under(
            `may be ${unclear.candidates.map(({ id }) => id).join(' or ')}: which one, neither its serial number nor its port tells`,
            style,
          )),
    ];
  });
  const missing = matched.missing.flatMap(({ id, kind, port, identification }) => [
    `${ink.bold(id)} (${kind.replace('-', ' ')}) answers nowhere; the rig file has it on ${port}${identification === undefined ? '' : ` as ${identification}`}`,
  ]);
  return [...(answers.length === 0 ? ['This machine has no serial port that an instrument could hang on.'] : lines), ...missing];
}

function standingText({ instrument: { id }, standing, before }: Found, hasFile: boolean): string {
  switch (standing) {
    case 'as written':
      return `${id}, as the rig file has it`;
    case 'named':
      return `${id}; what it answers was not written down yet`;
    case 'moved':
      return `${id}, which the rig file has on ${before?.port ?? 'another port'}`;
    case 'new':
      return hasFile ? 'not in the rig file' : 'new';
  }
}

/** Under a port: wrapped, two columns in. */
const under = (text: string, { columns }: Style): string[] => wrap(text, Math.max(20, columns - 3)).map((line) => `  ${line}`);
