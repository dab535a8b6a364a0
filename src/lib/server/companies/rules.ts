import { AppError } from '../../domain/errors.ts';
import { rolesOf, roleText, type CompanyKind, type Role } from '../../domain/roles.ts';

/** The set of roles as it is kept: each once, in the order of the kind; roles of the other kind are refused. */
export function rolesFor(kind: CompanyKind, wanted: readonly Role[]): Role[] {
  const possible = rolesOf(kind);
  const foreign = wanted.find((role) => !possible.includes(role));
  if (foreign) {
    throw new AppError('invalid-input', {
      fields: { roles: `A ${kind} has no role “${roleText[foreign].name}”.` },
    });
  }
  const roles = possible.filter((role) => wanted.includes(role));
  if (roles.length === 0)
    throw new AppError('invalid-input', { fields: { roles: 'Choose at least one role.' } });
  return roles;
}

/** A company always keeps an owner: without one nobody could ever invite or pay again. */
export function requireOwnerLeft(
  members: readonly { id: string; roles: readonly Role[] }[],
  changedId: string,
  newRoles: readonly Role[],
): void {
  const left = members.some((m) => (m.id === changedId ? newRoles : m.roles).includes('owner'));
  if (!left) {
    throw new AppError('state-conflict', {
      detail: 'This is the last owner of the company. Make somebody else an owner first.',
    });
  }
}

export function rolesInWords(roles: readonly Role[]): string {
  return roles.map((role) => roleText[role].name.toLowerCase()).join(', ');
}
