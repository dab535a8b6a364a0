export type CompanyKind = 'buyer' | 'fabricator';

export const buyerRoles = ['owner', 'engineer', 'purchaser', 'technician'] as const;
export const fabricatorRoles = ['owner', 'estimator', 'builder'] as const;
export type Role = (typeof buyerRoles)[number] | (typeof fabricatorRoles)[number];

export function rolesOf(kind: CompanyKind): readonly Role[] {
  return kind === 'buyer' ? buyerRoles : fabricatorRoles;
}

export const roleText: Record<Role, { name: string; does: string }> = {
  owner: { name: 'Owner', does: 'members, roles, approval limit, payouts and all that the others do' },
  engineer: { name: 'Engineer', does: 'machines and requests, judges drawings and as-built records' },
  purchaser: { name: 'Purchaser', does: 'compares bids, awards, funds and releases, opens disputes' },
  technician: { name: 'Technician', does: 'finds coils, enters running records, asks for repair' },
  estimator: { name: 'Estimator', does: 'asks questions and bids' },
  builder: { name: 'Builder', does: 'drawings, as-built records and shipping' },
};
