import { StrictMode } from 'react';
import { createRoot } from 'react-dom/client';
import { QueryClientProvider } from '@tanstack/react-query';
import { RouterProvider } from 'react-router-dom';
import '@fontsource/jetbrains-mono/latin-400.css';
import '@fontsource/jetbrains-mono/latin-700.css';
import '@fontsource/jetbrains-mono/greek-400.css';
import '@fontsource/jetbrains-mono/greek-700.css';
import '@fontsource-variable/atkinson-hyperlegible-next/wght.css';
import './look.css';
import './marks.css';
import { queryClient } from './lib/query-client.js';
import { applyTheme } from './lib/theme.js';
import { router } from './router.js';

applyTheme();

const root = document.getElementById('root');
if (!root) throw new Error('index.html has no element with the id "root".');
createRoot(root).render(
  <StrictMode>
    <QueryClientProvider client={queryClient}>
      <RouterProvider router={router} />
    </QueryClientProvider>
  </StrictMode>,
);
