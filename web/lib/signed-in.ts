import { createContext, useContext } from 'react';
import type { Shop, User } from '../../shared/api/sessions.js';

export interface SignedIn {
  user: User;
  shop: Shop;
}

export const SignedInContext = createContext<SignedIn | undefined>(undefined);

/** Who is signed in, and the shop; only below the layout that made sure of it. */
export function useSignedIn(): SignedIn {
  const signedIn = useContext(SignedInContext);
  if (!signedIn) throw new Error('This part of a page needs somebody to be signed in.');
  return signedIn;
}
