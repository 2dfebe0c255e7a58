import type { Capture } from '../lamps/capture.js';
import type { Sheet } from '../sheet/schema.js';
import { binLevels, type Bins } from './bin-levels.js';
import { modelLight, type LampLight } from './light-model.js';

/** The first stages, shared by every coding and by the pages' charts: columns by id, bins, levels, states. Lamps in panel order. */
export function seeLamps(capture: Capture, sheet: Sheet): { bins: Bins; lights: LampLight[] } {
  const ids = sheet.lamps.map((lamp) => lamp.id).filter((id) => capture.header.lamps.includes(id));
  const columns = ids.map((id) => capture.header.lamps.indexOf(id));
  const bins = binLevels(capture, columns);
  return { bins, lights: modelLight(bins, ids, capture.header.scale.max) };
}

/** A lamp's level while it is lit, as a share of full scale, over the whole capture; undefined when it was never seen lit. */
export function litFraction(light: LampLight, fullScale: number): number | undefined {
  let sum = 0;
  let count = 0;
  light.states.forEach((state, bin) => {
    if (state !== 1) return;
    sum += (light.fit.dark[bin] as number) + (light.fit.amplitude[bin] as number);
    count += 1;
  });
  return count === 0 ? undefined : Math.min(1, Math.max(0, sum / count / fullScale));
}
