/** A unit's number as it is written everywhere: at least four digits. */
export const unitNumberText = (number: number): string => String(number).padStart(4, '0');
export const unitLabel = (number: number): string => `No. ${unitNumberText(number)}`;

const MONTHS = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec'];

/** A day by the clock on the wall: `5 Mar 2026`. */
export function dayText(iso: string): string {
  const at = new Date(iso);
  return `${at.getDate()} ${MONTHS[at.getMonth()] ?? ''} ${at.getFullYear()}`;
}

/** Hours and minutes by the clock on the wall: `15:10`. */
export function timeText(at: string | Date): string {
  const date = new Date(at);
  return `${String(date.getHours()).padStart(2, '0')}:${String(date.getMinutes()).padStart(2, '0')}`;
}

/** `3 min`, or `42 s` where it is less than one. */
export function durationText(milliseconds: number): string {
  const seconds = Math.round(milliseconds / 1000);
  return seconds < 60 ? `${seconds} s` : `${Math.round(seconds / 60)} min`;
}

export const plural = (count: number, one: string, many = `${one}s`): string => `${count} ${count === 1 ? one : many}`;

/** How often, in words: `once`, `4 times`. */
export const times = (count: number): string => (count === 1 ? 'once' : `${count} times`);
