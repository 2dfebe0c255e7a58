import type { UnitPage } from '../../../../shared/api/units.js';
import type { UnitEvent } from '../../../../shared/history/events.js';
import { stageOf, type Stage } from '../../../../shared/readiness/stage.js';

export type TimelineItem =
  | { kind: 'event'; id: string; at: string; stage: Stage; event: UnitEvent }
  | { kind: 'run'; id: string; at: string; stage: Stage; events: UnitEvent[]; run: UnitPage['runs'][number] | undefined };

export interface TimelineGroup {
  stage: Stage;
  /** The newest moment of the group. */
  at: string;
  items: TimelineItem[];
}

/**
 * A unit's history as its page shows it: newest first, grouped by the stage that it led to, the events of a bench run folded into the run.
 * Outside the demo shop simulated work moves no stage. A proof run stands under `proving` even where its verdict sent the unit back.
 */
export function timelineOf(page: Pick<UnitPage, 'events' | 'runs'>, demo: boolean): TimelineGroup[] {
  const items: TimelineItem[] = [];
  const runs = new Map<string, Extract<TimelineItem, { kind: 'run' }>>();
  page.events.forEach((event, index) => {
    const stage = stageOf(page.events.slice(0, index + 1).filter(({ simulated }) => demo || !simulated));
    if (event.runId === undefined) {
      items.push({ kind: 'event', id: event.id, at: event.at, stage, event });
      return;
    }
    const known = runs.get(event.runId);
    if (known) {
      known.events.push(event);
      known.at = event.at;
      if (!(event.kind === 'run ended' && event.prove)) known.stage = stage;
      return;
    }
    const item: Extract<TimelineItem, { kind: 'run' }> = {
      kind: 'run',
      id: event.runId,
      at: event.at,
      stage,
      events: [event],
      run: page.runs.find((run) => run.id === event.runId),
    };
    runs.set(event.runId, item);
    items.push(item);
  });

  const groups: TimelineGroup[] = [];
  for (const item of items.reverse()) {
    const group = groups.at(-1);
    if (group?.stage === item.stage) group.items.push(item);
    else groups.push({ stage: item.stage, at: item.at, items: [item] });
  }
  return groups;
}
