import type { CompanyKind, Role } from './roles.ts';

export interface ActorMembership {
  companyId: string;
  companyName: string;
  kind: CompanyKind;
  /** Decided by an admin; always true for buyers. */
  verified: boolean;
  roles: Role[];
}

/** Who acts: the person with all memberships. The object of an act decides which one applies. */
export interface Actor {
  userId: string;
  name: string;
  email: string;
  emailVerified: boolean;
  isAdmin: boolean;
  /** Whether the person has set up a second factor. */
  twoFactor?: boolean;
  memberships: ActorMembership[];
  timeZone: string;
  unitSet: 'metric' | 'inch';
  requestId: string | null;
}
