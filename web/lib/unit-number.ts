import { useParams } from 'react-router-dom';

/** The unit number in the address; undefined where there stands something else. */
export function useUnitNumber(): number | undefined {
  const { number = '' } = useParams();
  return /^\d{1,10}$/.test(number) && Number(number) > 0 ? Number(number) : undefined;
}
