import { Fragment } from 'react';
import type { RatingPlate as Plate } from '../../shared/api/units.js';

const rows = (plate: Plate, control: string | undefined): [string, string][] => {
  const supply = [plate.volts === undefined ? '' : `${plate.volts} V`, plate.hertz === undefined ? '' : `${plate.hertz} Hz`]
    .filter(Boolean)
    .join(', ');
  const power = [plate.watts === undefined ? '' : `${plate.watts} W`, plate.amperes === undefined ? '' : `${plate.amperes} A`]
    .filter(Boolean)
    .join(', ');
  return (
    [
      ['serial', plate.serial ?? (plate.plateUnreadable ? 'unreadable' : 'not on the plate')],
      ['supply', supply],
      ['power', power],
      ['mass', plate.massKg === undefined ? '' : `${plate.massKg} kg`],
      ['class', plate.protectionClass],
      ['control', control ?? ''],
    ] satisfies [string, string][]
  ).filter(([, value]) => value !== '');
};

/** The machine's own plate, as it was typed off. */
export function RatingPlate({ plate, control }: { plate: Plate; control?: string | undefined }) {
  return (
    <div className="rating-plate">
      <div>
        <h2 className="mb-1.5 text-[18px]">
          {plate.maker} {plate.model}
        </h2>
        <dl className="grid grid-cols-[auto_1fr] items-baseline gap-x-3.5 gap-y-0.5">
          {rows(plate, control).map(([name, value]) => (
            <Fragment key={name}>
              <dt className="lab">{name}</dt>
              <dd className="font-mono text-[15px] break-all">{value}</dd>
            </Fragment>
          ))}
        </dl>
      </div>
    </div>
  );
}
