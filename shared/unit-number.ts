/**
 * A unit's number as labels, messages and addresses have it: at least four digits.
 *
 * @example unitNumberText(412) // '0412'
 */
export const unitNumberText = (number: number): string => String(number).padStart(4, '0');
