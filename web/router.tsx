import { createBrowserRouter, Navigate } from 'react-router-dom';
import { PageFault } from './pages/page-fault.js';
import { NotFoundPage } from './pages/not-found-page.js';
import { PublicLayout } from './pages/public-layout.js';
import { SignedInLayout } from './pages/signed-in-layout.js';
import { paths } from './paths.js';

const nothingYet = () => null;

export const router = createBrowserRouter([
  {
    ErrorBoundary: PageFault,
    HydrateFallback: nothingYet,
    children: [
      { path: '/', element: <Navigate to={paths.units()} replace /> },
      {
        Component: PublicLayout,
        children: [
          { path: 'sign-in', lazy: async () => ({ Component: (await import('./pages/sign-in-page.js')).SignInPage }) },
          { path: 'link', lazy: async () => ({ Component: (await import('./pages/link-page.js')).LinkPage }) },
          { path: 'first-admin', lazy: async () => ({ Component: (await import('./pages/first-admin-page.js')).FirstAdminPage }) },
        ],
      },
      {
        path: 't',
        lazy: async () => ({ Component: (await import('./pages/public-tag-page.js')).PublicTagFrame }),
        children: [
          { index: true, lazy: async () => ({ Component: (await import('./pages/look-up-tag-page.js')).LookUpTagPage }) },
          { path: ':tag', lazy: async () => ({ Component: (await import('./pages/public-tag-page.js')).PublicTagPage }) },
          { path: ':tag/:signature', lazy: async () => ({ Component: (await import('./pages/public-tag-page.js')).PublicTagPage }) },
        ],
      },
      {
        Component: SignedInLayout,
        children: [
          {
            ErrorBoundary: PageFault,
            children: [
              { path: 'units', lazy: async () => ({ Component: (await import('./pages/units-page.js')).UnitsPage }) },
              { path: 'units/new', lazy: async () => ({ Component: (await import('./pages/take-in-page.js')).TakeInPage }) },
              { path: 'units/:number', lazy: async () => ({ Component: (await import('./pages/unit-page.js')).UnitPage }) },
              { path: 'units/:number/sign-off', lazy: async () => ({ Component: (await import('./pages/sign-off-page.js')).SignOffPage }) },
              { path: 'units/:number/tag', lazy: async () => ({ Component: (await import('./pages/unit-tag-page.js')).UnitTagPage }) },
              { path: 'board', lazy: async () => ({ Component: (await import('./pages/board-page.js')).BoardPage }) },
              { path: 'benches', lazy: async () => ({ Component: (await import('./pages/benches-page.js')).BenchesPage }) },
              {
                path: 'units/:number/labels',
                lazy: async () => ({ Component: (await import('./pages/unit-labels-page.js')).UnitLabelsPage }),
              },
              { path: 'people', lazy: async () => ({ Component: (await import('./pages/people-page.js')).PeoplePage }) },
              { path: 'people/:id', lazy: async () => ({ Component: (await import('./pages/person-page.js')).PersonPage }) },
              { path: 'account', lazy: async () => ({ Component: (await import('./pages/account-page.js')).AccountPage }) },
              { path: 'audit', lazy: async () => ({ Component: (await import('./pages/audit-page.js')).AuditPage }) },
              { path: 'captures/:id', lazy: async () => ({ Component: (await import('./pages/capture-page.js')).CapturePage }) },
              { path: 'runs/:id', lazy: async () => ({ Component: (await import('./pages/run-page.js')).RunPage }) },
              { path: '*', Component: NotFoundPage },
            ],
          },
        ],
      },
    ],
  },
]);
