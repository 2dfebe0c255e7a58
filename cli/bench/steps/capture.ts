import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { captureText } from '../../journal/capture-file.js';
import { answerLines } from '../../render/answer-lines.js';
import { resultBase, type StepRunner } from '../bench.js';
import { probeSource } from '../lamp-source.js';
import { recordLamps } from '../record-lamps.js';
import { watching } from '../watchers.js';

/** Records the lamps. */
export const runCapture: StepRunner<'capture'> = async (step, bench, start) => {
  const { context, unit, rig, technician } = bench;
  const { sheet } = unit;
  await bench.checkSensors();
  rig.hands?.lampsShow(step.id, 'capture');
  const { ended } = await recordLamps({
    context,
    captureId: start.captureId,
    unit: unit.page.unit.number,
    sheet,
    source: await probeSource(rig, sheet),
    seconds: step.seconds,
    watcher: watching({ context, sheet, attended: technician.attended }),
  });
  const file = captureText(context.home, start.captureId);
  // Broken off by a key or Ctrl-C: what came is kept, and the step is asked again when somebody goes on.
  if (ended === 'left' || ended === 'interrupted')
    return { result: { ...resultBase(step, bench, start), kind: 'cut', captureId: start.captureId, file }, rest: 'stop' };
  bench.say(...answerLines(decodeCapture(readCapture(file), sheet), sheet, bench.style));
  const result = { ...resultBase(step, bench, start), kind: 'capture', captureId: start.captureId, file, fromFile: false } as const;
  return { result };
};
