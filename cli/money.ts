import { UsageError } from './errors.js';

/** How many decimals a currency is written with (ISO 4217): 2 for GBP, 0 for JPY. */
function decimalsOf(currency: string): number {
  return new Intl.NumberFormat('en-GB', { style: 'currency', currency }).resolvedOptions().maximumFractionDigits ?? 2;
}

/**
 * Money as it is typed, in the minor units of the shop's currency. Digits are moved, never multiplied: 0.29 is 29.
 *
 * @example parseMoney('6.00', 'GBP', '--cost') // 600
 */
export function parseMoney(text: string, currency: string, option: string): number {
  const decimals = decimalsOf(currency);
  const parts = /^(\d{1,7})(?:\.(\d+))?$/.exec(text.trim());
  const fraction = parts?.[2] ?? '';
  if (!parts || fraction.length > decimals) {
    throw new UsageError(
      `${option}: '${text}' is no sum of money. Write it in ${currency}, like ${decimals === 0 ? '12' : `12.${'5'.padEnd(decimals, '0')}`}`,
    );
  }
  return Number(`${parts[1] ?? '0'}${fraction.padEnd(decimals, '0')}`);
}

/** @example moneyText(600, 'GBP') // '£6.00' */
export function moneyText(minor: number, currency: string): string {
  return new Intl.NumberFormat('en-GB', { style: 'currency', currency }).format(minor / 10 ** decimalsOf(currency));
}
