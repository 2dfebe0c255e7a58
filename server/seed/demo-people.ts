import type { Role } from '../../shared/api/roles.js';
import type { Shop } from '../../shared/api/sessions.js';

export const DEMO_SHOP: Shop = {
  name: 'Millrace Mend',
  address: '12 Dyehouse Yard',
  phone: '01632 960412',
  currency: 'GBP',
  demo: true,
  fourEyes: true,
  warrantyMonths: 12,
};

/** The first of a role is the one whose password is handed out. */
export const DEMO_PEOPLE: readonly { role: Role; name: string; email: string }[] = [
  { role: 'technician', name: 'Wil Tarrow', email: 'wil@millrace.example' },
  { role: 'lead', name: 'Maren Holt', email: 'maren@millrace.example' },
  { role: 'sales', name: 'Odile Finch', email: 'odile@millrace.example' },
  { role: 'admin', name: 'Joss Penn', email: 'joss@millrace.example' },
  { role: 'technician', name: 'Tamsin Oake', email: 'tamsin@millrace.example' },
];
