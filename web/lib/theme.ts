import { useSyncExternalStore } from 'react';

export type Theme = 'day' | 'night';
const STORAGE_KEY = 'refettle.theme';
const system = window.matchMedia('(prefers-color-scheme: dark)');
const listeners = new Set<() => void>();

/** What was picked on this device; private windows may have no storage. */
function picked(): Theme | undefined {
  try {
    const stored = localStorage.getItem(STORAGE_KEY);
    return stored === 'day' || stored === 'night' ? stored : undefined;
  } catch {
    return undefined;
  }
}

function current(): Theme {
  return picked() ?? (system.matches ? 'night' : 'day');
}

/** Puts the theme on the page: once before the first paint, and whenever it changes. The device decides until somebody picks. */
export function applyTheme(): void {
  document.documentElement.dataset.theme = current();
  for (const listener of listeners) listener();
}

export function pickTheme(theme: Theme): void {
  try {
    localStorage.setItem(STORAGE_KEY, theme);
  } catch {
    // Kept for this page only.
    document.documentElement.dataset.theme = theme;
    return;
  }
  applyTheme();
}

system.addEventListener('change', applyTheme);

export function useTheme(): Theme {
  return useSyncExternalStore(
    (listener) => {
      listeners.add(listener);
      return () => listeners.delete(listener);
    },
    () => (document.documentElement.dataset.theme === 'night' ? 'night' : 'day'),
  );
}
