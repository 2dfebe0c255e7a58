import { viewCapture } from '../../../shared/decode/view-capture.js';
import { holesOf } from '../../../shared/lamps/holes.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { clock, judgeWatch, watchSpec } from '../../../shared/script/judge-watch.js';
import { captureText } from '../../journal/capture-file.js';
import { resultBase, type StepRunner } from '../bench.js';
import type { LampWindow } from '../lamp-window.js';
import { probeSource } from '../lamp-source.js';
import { recordLamps } from '../record-lamps.js';
import { watching } from '../watchers.js';

/** How long it may take until it begins: walking round the machine, the control thinking (common practice, no published source). */
const BEGINS_WITHIN_S = 60;
/** Behind the most it may take: as long as an end must hold to be believed, and a little. */
const SETTLES_S = 5;

/** Waits for a lamp pattern within a time; `calibration` is the control's own calibration cycle. */
export const runWatch: StepRunner<'watch'> = async (step, bench, start) => {
  const { context, unit, rig, technician } = bench;
  const { sheet } = unit;
  const spec = watchSpec(step, sheet);
  const [leastS, mostS] = spec.withinS;
  const seconds = BEGINS_WITHIN_S + mostS + SETTLES_S;
  await bench.checkSensors();
  rig.hands?.lampsShow(step.id, 'watch');
  const over = (window: LampWindow): boolean => {
    const { capture } = window.capture();
    return judgeWatch(viewCapture(capture, sheet), spec, window.lastUs / 1_000_000, holesOf(capture)).over;
  };
  const { ended } = await recordLamps({
    context,
    captureId: start.captureId,
    unit: unit.page.unit.number,
    sheet,
    source: await probeSource(rig, sheet),
    seconds,
    windowSeconds: seconds + SETTLES_S,
    watcher: watching({
      context,
      sheet,
      attended: technician.attended,
      over,
      waitsFor: `${step.title}, ${clock(leastS)} to ${clock(mostS)}`,
    }),
  });
  const file = captureText(context.home, start.captureId);
  // Broken off by a key or Ctrl-C: what came is kept, and the step is asked again when somebody goes on.
  if (ended === 'left' || ended === 'interrupted')
    return { result: { ...resultBase(step, bench, start), kind: 'cut', captureId: start.captureId, file }, rest: 'stop' };
  const capture = readCapture(file);
  const durationS = (capture.endUs ?? capture.timesUs.at(-1) ?? 0) / 1_000_000;
  const judged = judgeWatch(viewCapture(capture, sheet), spec, durationS, holesOf(capture));
  const watched = { seconds: judged.seconds, verdict: judged.verdict, reason: judged.reason, captureId: start.captureId };
  const result = {
    ...resultBase(step, bench, start),
    kind: 'watch',
    captureId: start.captureId,
    file,
    calibration: step.calibration === true,
    watched,
  } as const;
  return { result };
};
