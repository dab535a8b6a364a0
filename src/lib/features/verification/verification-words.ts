import {
  coilShapeCapabilities,
  shopTestCapabilities,
  shopWorkCapabilities,
  type ShopCapabilities,
  type VerificationState,
} from '../../domain/verification.ts';
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { formatField } from '../../induction/units/format-quantity.ts';
import type { StateKind } from '../../ui/state-kind.ts';

export const verificationStateText: Record<VerificationState, string> = {
  asked: 'Waits for an answer',
  verified: 'Verified',
  refused: 'Refused',
  withdrawn: 'Withdrawn',
  revoked: 'Ended before its date',
};

export const verificationStateKind: Record<VerificationState, StateKind> = {
  asked: 'waiting',
  verified: 'ok',
  refused: 'blocker',
  withdrawn: 'neutral',
  revoked: 'blocker',
};

function span(from: string, to: string): string | null {
  if (from !== '' && to !== '') return `${from} to ${to}`;
  if (to !== '') return `up to ${to}`;
  return from === '' ? null : `from ${from}`;
}

/** What a shop declares, as terms and values in the person's units; nothing that was not stated. */
export function capabilityItems(
  capabilities: ShopCapabilities,
  unitSet: UnitSet,
): { term: string; value: string }[] {
  const length = (value: number | null) => formatField(value, 'length', unitSet);
  const items: [string, string | null][] = [
    ['Coil shapes', capabilities.shapes.map((shape) => coilShapeCapabilities[shape]).join(', ')],
    ['Copper tube, outside', span(length(capabilities.tubeMin), length(capabilities.tubeMax))],
    ['Largest coil diameter', length(capabilities.coilDiameterMax)],
    ['Largest coil length', length(capabilities.coilLengthMax)],
    ['Work', capabilities.work.map((item) => shopWorkCapabilities[item]).join(', ')],
    ['Tests in the shop', capabilities.tests.map((test) => shopTestCapabilities[test]).join(', ')],
  ];
  return items.flatMap(([term, value]) => (value ? [{ term, value }] : []));
}
