import { unitNumber } from './lib/format.js';

/** Every link of the web companion is built here. */
export const paths = {
  signIn: (back?: string) => (back === undefined ? '/sign-in' : `/sign-in?${new URLSearchParams({ back }).toString()}`),
  firstAdmin: () => '/first-admin',
  units: (view: { find?: string | undefined; stage?: string | undefined } = {}) => {
    const query = new URLSearchParams(Object.entries(view).flatMap(([key, value]) => (value ? [[key, value]] : [])));
    return query.size > 0 ? `/units?${query.toString()}` : '/units';
  },
  takeIn: () => '/units/new',
  board: () => '/board',
  benches: () => '/benches',
  people: () => '/people',
  person: (id: string) => `/people/${encodeURIComponent(id)}`,
  account: () => '/account',
  audit: (filter: { who?: string } = {}) => (filter.who === undefined ? '/audit' : `/audit?${new URLSearchParams(filter).toString()}`),
  unit: (number: number) => `/units/${unitNumber(number)}`,
  signOff: (number: number) => `${paths.unit(number)}/sign-off`,
  unitTag: (number: number, print?: { format: string; with?: string | undefined }) => {
    const query = new URLSearchParams(Object.entries(print ?? {}).flatMap(([key, value]) => (value ? [[key, value]] : [])));
    return `${paths.unit(number)}/tag${query.size > 0 ? `?${query.toString()}` : ''}`;
  },
  unitLabels: (number: number, kind: 'stock' | 'price' = 'stock', size?: string) =>
    `${paths.unit(number)}/labels?${new URLSearchParams({ kind, ...(size === undefined ? {} : { size }) }).toString()}`,
  capture: (id: string) => `/captures/${encodeURIComponent(id)}`,
  run: (id: string) => `/runs/${encodeURIComponent(id)}`,
  lookUpTag: (tag?: string) => (tag === undefined ? '/t' : `/t?${new URLSearchParams({ tag }).toString()}`),
  publicTagByWord: (tag: string, word: string) => `/t/${encodeURIComponent(tag)}?${new URLSearchParams({ word }).toString()}`,
};

/** A place to go back to after signing in: only a path of this site. */
export function safeBack(back: string | null): string {
  return back !== null && /^\/(?![/\\])/.test(back) ? back : paths.units();
}
