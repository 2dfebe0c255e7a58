import type { ReactNode } from 'react';
import { Link, NavLink, Outlet, ScrollRestoration, useNavigate } from 'react-router-dom';
import { mayDo } from '../../shared/api/roles.js';
import type { User } from '../../shared/api/sessions.js';
import { pickTheme, useTheme } from '../lib/theme.js';
import { paths } from '../paths.js';
import { MarkDefinitions } from './verdict.js';

export function Wordmark() {
  return (
    <>
      <svg viewBox="0 0 34 20" width="34" height="20" aria-hidden="true">
        <path fill="currentColor" fillRule="evenodd" d="M6 0H34V20H6L0 14V6zM8 6.6a3.4 3.4 0 1 0 .01 0z" />
      </svg>
      Refettle
    </>
  );
}

export function ThemeSwitch() {
  const theme = useTheme();
  return (
    <button
      type="button"
      aria-pressed={theme === 'night'}
      className="min-h-11 cursor-pointer px-1 underline underline-offset-4"
      onClick={() => pickTheme(theme === 'night' ? 'day' : 'night')}
    >
      {theme === 'night' ? 'Day' : 'Night'} <span className="sr-only">bench colours</span>
    </button>
  );
}

function FindBox() {
  const navigate = useNavigate();
  return (
    <form
      role="search"
      className="find-box gap-2.5"
      onSubmit={(event) => {
        event.preventDefault();
        const find = new FormData(event.currentTarget).get('find');
        void navigate(paths.units({ find: typeof find === 'string' ? find.trim() : '' }));
      }}
    >
      <label className="lab" htmlFor="find-in-header">
        Find
      </label>
      <input
        id="find-in-header"
        name="find"
        type="search"
        maxLength={100}
        className="field min-h-11! w-56 py-1!"
        placeholder="number or serial"
      />
    </form>
  );
}

/** Header, landmarks and skip link of every page that somebody signed in for. Without `user` only the mark and the theme. */
export function ShopFrame({
  user,
  onSignOut,
  find = false,
  children,
}: {
  user?: User | undefined;
  onSignOut?: () => void;
  find?: boolean;
  children?: ReactNode;
}) {
  return (
    <>
      <MarkDefinitions />
      <ScrollRestoration />
      <a className="skip" href="#main">
        Skip to the page
      </a>
      <header className="top">
        <Link className="wordmark" to={paths.units()}>
          <Wordmark />
        </Link>
        {user && mayDo(user.role, 'unit.read') && (
          <nav aria-label="Main" className="word-tabs flex-wrap items-stretch!">
            <NavLink to={paths.units()}>Units</NavLink>
            <NavLink to={paths.board()}>Going on</NavLink>
            {mayDo(user.role, 'bench.read') && <NavLink to={paths.benches()}>Shared benches</NavLink>}
            {mayDo(user.role, 'person.read') && <NavLink to={paths.people()}>People</NavLink>}
            {mayDo(user.role, 'audit.read') && <NavLink to={paths.audit()}>Audit log</NavLink>}
            <NavLink to={paths.lookUpTag()}>Look up a tag</NavLink>
          </nav>
        )}
        {find && <FindBox />}
        {user && (
          <Link to={paths.account()} className="top-who min-h-11 flex-col items-start! justify-center leading-tight">
            <span className="sr-only">Your account, </span>
            {user.name}
            <span className="lab">{user.role}</span>
          </Link>
        )}
        <div className="top-actions gap-4">
          <ThemeSwitch />
          {onSignOut && (
            <button type="button" className="min-h-11 cursor-pointer px-1 underline underline-offset-4" onClick={onSignOut}>
              Sign out
            </button>
          )}
        </div>
      </header>
      <main id="main" className="page mx-auto">
        {children ?? <Outlet />}
      </main>
    </>
  );
}
