const DATE = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'short', year: 'numeric' });
const WEEKDAY = new Intl.DateTimeFormat('en-GB', { weekday: 'short' });
const TIME = new Intl.DateTimeFormat('en-GB', { hour: '2-digit', minute: '2-digit', hour12: false });

// Intl's British September is "Sept"; every other month has three letters.
const dateParts = (at: Date): string => DATE.format(at).replace('Sept', 'Sep');

/** `5 Mar 2026`, in the reader's own time zone. */
export const formatDate = (iso: string): string => dateParts(new Date(iso));
/** `Thu 5 Mar 2026`. */
export const formatDay = (iso: string): string => `${WEEKDAY.format(new Date(iso))} ${formatDate(iso)}`;
/** `Thu 5 Mar` in the year of `nowMs`, `5 Mar 2025` in others: for narrow columns. */
export function formatShortDay(iso: string, nowMs: number): string {
  const date = new Date(iso);
  if (date.getFullYear() !== new Date(nowMs).getFullYear()) return formatDate(iso);
  return `${WEEKDAY.format(date)} ${dateParts(date).replace(/ \d{4}$/, '')}`;
}
/** `11:41`. */
export const formatTime = (iso: string): string => TIME.format(new Date(iso));
export const formatDayTime = (iso: string): string => `${formatDay(iso)}, ${formatTime(iso)}`;

/** `0412`: at least four digits. */
export const unitNumber = (number: number): string => String(number).padStart(4, '0');

/** Minor units of a currency as that currency writes them: 2760 GBP is `£27.60`. */
export function formatMoney(minor: number, currency: string): string {
  return new Intl.NumberFormat('en-GB', { style: 'currency', currency }).format(minor / 10 ** minorDigits(currency));
}

function minorDigits(currency: string): number {
  return new Intl.NumberFormat('en-GB', { style: 'currency', currency }).resolvedOptions().maximumFractionDigits ?? 2;
}

/** What was typed as money, in minor units; NaN where it is no amount of this currency. */
export function parseMoney(text: string, currency: string): number {
  const digits = minorDigits(currency);
  const match = /^(\d+)(?:\.(\d+))?$/.exec(text.trim());
  if (!match || (match[2]?.length ?? 0) > digits) return NaN;
  return Number(`${match[1]}${(match[2] ?? '').padEnd(digits, '0')}`);
}

const MINUTE_MS = 60_000;
const HOUR_MS = 60 * MINUTE_MS;
const DAY_MS = 24 * HOUR_MS;

/** How long ago, in the coarsest unit that is whole: `7 min`, `3 h`, `2 days`. */
export function formatAge(iso: string, nowMs: number): string {
  const ms = Math.max(0, nowMs - Date.parse(iso));
  if (ms < HOUR_MS) return `${Math.floor(ms / MINUTE_MS)} min`;
  if (ms < DAY_MS) return `${Math.floor(ms / HOUR_MS)} h`;
  const days = Math.floor(ms / DAY_MS);
  return days === 1 ? '1 day' : `${days} days`;
}

/** How long something took: `33 min`, `45 s`. */
export function formatDuration(fromIso: string, toIso: string): string {
  const seconds = Math.max(0, Math.round((Date.parse(toIso) - Date.parse(fromIso)) / 1000));
  return seconds < 120 ? `${seconds} s` : `${Math.round(seconds / 60)} min`;
}

export const plural = (count: number, one: string, many = `${one}s`): string => `${count} ${count === 1 ? one : many}`;
