import type { LiveMessageOf } from '../../shared/api/live.js';
import type { CaptureHeader } from '../../shared/lamps/capture.js';
import type { StepResult } from '../../shared/script/run-log.js';
import { runVerdict, stepVerdict } from '../../shared/script/run-verdict.js';
import type { Script, Step } from '../../shared/script/schema.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Verdict } from '../../shared/verdict.js';
import type { Understanding } from '../bench/live-view.js';
import { UnderstandingPace } from '../bench/understanding-pace.js';
import type { UnitOnBench } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import type { ProbeEvent } from '../instruments/rig.js';
import { LampThinner } from './lamp-thinner.js';
import { LiveRelay } from './live-relay.js';
import { codeSoFar, shortened, shortName, stepOf, stepTold } from './live-words.js';

export interface WorkBegins {
  id: string;
  what: 'run' | 'capture' | 'measure';
  unit: UnitOnBench;
  title: string;
  steps: readonly Pick<Step, 'id' | 'kind' | 'title'>[];
  /** Undefined: by keys, or typed in. */
  rig: { name: string; simulated: boolean } | undefined;
  /** Who does it; undefined: who is signed in. */
  person?: { id: string } | undefined;
}

/** What the bench's work tells those who watch: an observer that is called and never waited for. */
export class LiveWork {
  readonly #relay: LiveRelay;
  readonly #now: () => string;
  #steps: string[] = [];
  readonly #pace = new UnderstandingPace();
  #lastCode = '';

  constructor(context: Context) {
    this.#relay = new LiveRelay({
      api: (as) => context.api(as),
      newId: () => context.newId(),
      say: (line) => context.stderr.say(line),
    });
    this.#now = () => context.now().toISOString();
  }

  begins({ id, what, unit, title, steps, rig, person }: WorkBegins): void {
    const { number, plate } = unit.page.unit;
    this.#steps = steps.map((step) => step.id);
    this.#relay.begin(
      { id, unit: number, by: person ?? unit.by },
      {
        kind: 'began',
        at: this.#now(),
        what,
        title: shortened(title),
        machine: shortened(`${plate.maker} ${plate.model}`),
        steps: steps.map(stepOf),
        rig: { name: shortName(rig?.name ?? 'by hand'), simulated: rig?.simulated === true },
      },
    );
  }

  /** A run of a script; `before`: what it recorded before it was interrupted. */
  runBegins(work: {
    id: string;
    unit: UnitOnBench;
    script: Script;
    rig: WorkBegins['rig'];
    before: readonly StepResult[];
    person: { id: string } | undefined;
  }): void {
    const { script, before, ...rest } = work;
    this.begins({ ...rest, what: 'run', title: script.title, steps: script.steps });
    before.forEach((result) => this.stepEnded(result));
  }

  stepBegins(stepId: string): void {
    const index = this.#steps.indexOf(stepId);
    if (index >= 0) this.#relay.tell({ kind: 'step began', at: this.#now(), index });
  }

  stepEnded(result: StepResult): void {
    this.told(result.stepId, stepTold(result), stepVerdict(result), result.endedAt);
  }

  told(stepId: string, words: string, verdict: Verdict | undefined, at = this.#now()): void {
    const index = this.#steps.indexOf(stepId);
    if (index < 0) return;
    this.#relay.tell({
      kind: 'step ended',
      at: new Date(at).toISOString(),
      index,
      told: shortened(words),
      ...(verdict === undefined ? {} : { verdict }),
    });
  }

  /** The lamps are being recorded. */
  captureBegins({
    captureId,
    header,
    sheet,
    seconds,
  }: {
    captureId: string;
    header: CaptureHeader;
    sheet: Sheet;
    seconds: number | undefined;
  }): LiveCapture {
    const relay = this.#relay;
    const byKeys = header.source === 'keys';
    const thinner = new LampThinner({ scaleMax: header.scale.max, byKeys });
    const weights: Readonly<Record<string, number>> = sheet.coding.kind === 'weighted-phases' ? sheet.coding.weights : {};
    this.#pace.soon();
    this.#lastCode = '';
    relay.recording = true;
    relay.tell({
      kind: 'capture began',
      at: this.#now(),
      captureId,
      byKeys,
      lamps: sheet.lamps.map(({ id, label, colour }) => ({
        id: shortName(id),
        label: shortName(label),
        colour,
        ...(weights[id] === undefined ? {} : { weight: weights[id] }),
      })),
      ...(seconds === undefined ? {} : { seconds }),
    });
    return {
      seen(event) {
        const row = event.kind === 'sample' && relay.on ? thinner.push(event.tUs, event.levels) : undefined;
        if (row) relay.tell({ kind: 'lamps', rows: [row] }, { mayWait: !thinner.tellsEdge });
      },
      marked: (atUs) => relay.tell({ kind: 'mark', atMs: Math.round(atUs / 1000) }),
      ended: (how) => {
        relay.recording = false;
        relay.tell({ kind: 'capture ended', at: this.#now(), how });
      },
    };
  }

  /** What the decoder makes of it so far, where somebody has just worked it out anyway. */
  understood(understood: Understanding, sheet: Sheet, scaleMax: number): void {
    if (!this.#relay.on) return;
    const message = codeSoFar(understood, sheet, scaleMax);
    const text = JSON.stringify(message);
    if (text === this.#lastCode) return;
    this.#lastCode = text;
    this.#relay.tell(message);
  }

  /** The same where nobody else works it out: asked at every sample, done now and then. */
  understandNowAndThen(understand: () => Understanding, sheet: Sheet, scaleMax: number): void {
    if (this.#relay.on && this.#pace.isDue) this.understood(this.#pace.take(understand), sheet, scaleMax);
  }

  async ends(how: LiveMessageOf<'ended'>['how'], verdict?: Verdict): Promise<void> {
    await this.#relay.end({ kind: 'ended', at: this.#now(), how, ...(verdict === undefined ? {} : { verdict }) });
  }

  async runEnds(results: readonly StepResult[], { interrupted, left }: { interrupted: boolean; left?: string | undefined }): Promise<void> {
    const how = !interrupted ? 'ended' : left === 'parked' ? 'parked' : left === 'stopped' ? 'stopped' : 'failed';
    await this.ends(how, interrupted ? undefined : runVerdict(results, false));
  }
}

export interface LiveCapture {
  seen(event: ProbeEvent): void;
  marked(atUs: number): void;
  ended(how: LiveMessageOf<'capture ended'>['how']): void;
}

const works = new WeakMap<Context, LiveWork>();

/** One a terminal. Loaded only by what works at a bench: `--help` needs nothing of it. */
export function liveOf(context: Context): LiveWork {
  const work = works.get(context) ?? new LiveWork(context);
  works.set(context, work);
  return work;
}
