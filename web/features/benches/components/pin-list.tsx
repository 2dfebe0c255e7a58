import { useState } from 'react';
import { pinSchema, type PinState } from '../../../../shared/api/benches.js';
import { FormField } from '../../../components/form-field.js';
import { ErrorNote } from '../../../components/page-states.js';
import { faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { formatDate } from '../../../lib/format.js';
import { useClearPin, useSetPin } from '../api/change-pin.js';

/** Who can sign on at shared benches: technicians and leads, with their PINs set or not. Nobody sees a PIN. */
export function PinList({ states, ownId }: { states: readonly PinState[]; ownId: string }) {
  return (
    <ul>
      {states.map((state) => (
        <li key={state.person.id} className="border-b border-line py-2">
          <PinEntry state={state} own={state.person.id === ownId} />
        </li>
      ))}
    </ul>
  );
}

export const pinWords = ({ pinSetAt, pinSetBy }: PinState): string =>
  pinSetAt === undefined ? 'no PIN' : `PIN set ${formatDate(pinSetAt)}${pinSetBy === undefined ? '' : ` by ${pinSetBy}`}`;

function PinEntry({ state, own }: { state: PinState; own: boolean }) {
  const [open, setOpen] = useState(false);
  const { name, role } = state.person;
  return (
    <div className="grid items-center gap-x-11 gap-y-2 wide:grid-cols-[1fr_1fr_220px]">
      <p>
        <b>{name}</b> <span className="lab">{role}</span>
      </p>
      <p>{pinWords(state)}</p>
      {own ? (
        <p className="lab">yours: under your account</p>
      ) : (
        !open && (
          <button type="button" className="button button-plain" onClick={() => setOpen(true)}>
            Change <span className="sr-only">the PIN of {name}</span>
          </button>
        )
      )}
      {open && (
        <div className="wide:col-span-3">
          <ChangePin state={state} onDone={() => setOpen(false)} />
        </div>
      )}
    </div>
  );
}

function ChangePin({ state, onDone }: { state: PinState; onDone: () => void }) {
  const { id, name } = state.person;
  const setPin = useSetPin(id);
  const clearPin = useClearPin(id);
  const [pin, changePin] = useState('');
  const [fault, setFault] = useState<string>();
  const pointed = faultsOfProblem(setPin.error)[0]?.reason;
  const error = setPin.error && pointed === undefined ? setPin.error : clearPin.error;
  return (
    <form
      noValidate
      className="grid max-w-[560px] gap-3 pb-2"
      onSubmit={(event) => {
        event.preventDefault();
        const parsed = pinSchema.safeParse(pin);
        setFault(parsed.error?.issues[0]?.message);
        if (parsed.success) setPin.mutate(parsed.data, { onSuccess: onDone });
      }}
    >
      <FormField
        id={fieldId(`pin-of-${id}`)}
        label={`New PIN for ${name}`}
        hint={`4 to 8 digits. Tell it to ${name} alone; the audit log says that you set it.`}
        error={fault ?? pointed}
      >
        {(a11y) => (
          <input
            {...a11y}
            className="field max-w-56 font-mono"
            type="password"
            inputMode="numeric"
            autoComplete="off"
            maxLength={8}
            value={pin}
            onChange={(event) => changePin(event.target.value)}
          />
        )}
      </FormField>
      {error && <ErrorNote error={error} />}
      <div className="flex flex-wrap gap-3">
        <button type="submit" className="button" disabled={setPin.isPending}>
          Set the PIN
        </button>
        {state.pinSetAt !== undefined && (
          <button
            type="button"
            className="button button-plain"
            disabled={clearPin.isPending}
            onClick={() => clearPin.mutate(undefined, { onSuccess: onDone })}
          >
            Take the PIN away
          </button>
        )}
        <button type="button" className="button button-plain" onClick={onDone}>
          Leave it as it is
        </button>
      </div>
    </form>
  );
}
