import { sql } from 'drizzle-orm';
import { materialName } from '../../schemas/forms/materials.ts';
import type { Commercial } from '../../domain/commercial.ts';
import type { Requirement } from '../../induction/check/types.ts';
import type { Tx } from '../db/index.ts';

export function materialKey(requirement: Requirement): string {
  const { material } = requirement.part;
  return material.kind === 'library' ? material.id : 'own';
}

/** Largest outside dimension of the tube, by which the board filters. */
export function tubeSize(requirement: Requirement): number {
  const { tube } = requirement.coil;
  if (tube.kind === 'round') return tube.outsideDiameter;
  return tube.kind === 'square' ? tube.side : Math.max(tube.axialWidth, tube.radialHeight);
}

/** The words a bidder may find a request by; nothing that belongs to the buyer alone. */
export function searchWords(requirement: Requirement, commercial: Commercial, buyerName: string): string {
  const { part, process, coil, fixture } = requirement;
  const material = part.material.kind === 'library' ? materialName(part.material.id) : part.material.own.name;
  return [
    buyerName,
    material,
    part.form,
    process.purpose,
    coil.winding.shape,
    coil.winding.shape === 'drawing' ? coil.winding.note : '',
    coil.tube.kind,
    coil.copperGrade,
    coil.insulation.kind,
    fixture.kind === 'none' ? '' : `fixture ${fixture.kind} ${fixture.material}`,
    requirement.acceptance.map((line) => line.label).join(' '),
    commercial.deliveryPlace,
    commercial.freeIssue,
  ].join(' ');
}

export async function writeToSearch(tx: Tx, requestId: string, title: string, words: string): Promise<void> {
  await removeFromSearch(tx, requestId);
  await tx.run(
    sql`insert into request_search (request_id, title, words) values (${requestId}, ${title}, ${words})`,
  );
}

/** Only what is open for bids is found. */
export async function removeFromSearch(tx: Tx, requestId: string): Promise<void> {
  await tx.run(sql`delete from request_search where request_id = ${requestId}`);
}
