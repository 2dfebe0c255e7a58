import type { FieldErrors, FieldValues } from 'react-hook-form';
import { ApiProblem } from './api-problem.js';

/** The element id of a field in a form: `plate.serial` is `field-plate-serial`. */
export const fieldId = (name: string): string => `field-${name.replaceAll('.', '-')}`;

export interface Fault {
  name: string;
  reason: string;
}

/** react-hook-form's nested errors as a list, in the order of the fields. */
export function faultsOf<T extends FieldValues>(errors: FieldErrors<T>, prefix = ''): Fault[] {
  return Object.entries(errors).flatMap(([key, value]) => {
    if (value === undefined || key === 'root') return [];
    const name = `${prefix}${key}`;
    const own = value as { message?: unknown; type?: unknown };
    if (typeof own.message === 'string') return [{ name, reason: own.message }];
    return typeof value === 'object' ? faultsOf(value as FieldErrors, `${name}.`) : [];
  });
}

/** The faults that a refusal points out by JSON pointer: `/plate/serial` is `plate.serial`. */
export function faultsOfProblem(error: unknown): Fault[] {
  if (!(error instanceof ApiProblem)) return [];
  return error.errors.map(({ pointer, reason }) => ({ name: pointer.replace(/^\/(?:body\/)?/, '').replaceAll('/', '.'), reason }));
}
