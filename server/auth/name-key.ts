/** As names are compared: somebody who types one more blank, or no capital, means the same. */
export const nameKey = (name: string): string => name.trim().toLowerCase().replace(/\s+/g, ' ');
