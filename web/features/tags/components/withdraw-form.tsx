import { withdrawTagSchema } from '../../../../shared/api/tags.js';
import { ReasonForm } from '../../../components/reason-form.js';
import { useWithdrawTag } from '../api/withdraw-tag.js';

/** A lead takes a standing tag back; the buyer's page says so from then on. */
export function WithdrawForm({ unit, tag }: { unit: number; tag: string }) {
  const withdraw = useWithdrawTag(unit, tag);
  return (
    <ReasonForm
      className="mt-5 border-t border-line"
      summary="Withdraw this tag"
      label="Why it no longer stands"
      hint="Kept in the unit’s history. It cannot be taken back: the unit must be signed off again."
      button="Withdraw the tag"
      maxLength={500}
      schema={withdrawTagSchema}
      sending={withdraw}
      send={(reason) => withdraw.mutate(reason)}
    />
  );
}
