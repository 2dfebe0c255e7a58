import type { Capture } from '../lamps/capture.js';
import type { Sheet } from '../sheet/schema.js';
import type { LampLight } from './light-model.js';
import { litFraction } from './see-lamps.js';

/** A lamp that reads below this share of full scale is called weak: the probe sits badly, or the lamp is going. */
const WEAK_SHARE = 0.5;

/** What a technician should know beside the codes: columns passed over, weak lamps, a sheet that isn't this capture's. */
export function warningsFor(capture: Capture, sheet: Sheet, lights: readonly LampLight[]): string[] {
  const warnings: string[] = [];
  const { header } = capture;
  if (header.family !== undefined && header.family !== sheet.family) {
    warnings.push(`the capture is of family '${header.family}', the sheet of '${sheet.family}'`);
  }
  const known = new Set(sheet.lamps.map((lamp) => lamp.id));
  for (const id of header.lamps) if (!known.has(id)) warnings.push(`lamp '${id}' is not in the sheet: its column is passed over`);
  if (capture.timesUs.length === 0) warnings.push('the capture holds no samples: check the probe, and capture again');
  for (const light of lights) {
    const share = litFraction(light, header.scale.max);
    if (share !== undefined && share < WEAK_SHARE) warnings.push(`lamp '${light.id}' reads at ${Math.round(share * 100)} % of full scale`);
  }
  return warnings;
}
