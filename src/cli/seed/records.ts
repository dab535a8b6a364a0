import { resolveAcceptance } from '../../lib/induction/check/resolve-acceptance.ts';
import type { AcceptanceLine, CheckResult, Requirement } from '../../lib/induction/check/types.ts';
import type { AsBuiltBody } from '../../lib/domain/as-built.ts';
import { dateIn } from '../../lib/domain/dates.ts';
import { businessNow } from '../../lib/server/adapters/clock.ts';
import { enterRecord, orderSpecificationOf, piecesOf } from '../../lib/server/orders/index.ts';
import type { Shop } from './cast.ts';
import { plainPdf } from './papers.ts';
import type { SeedWorld } from './world.ts';

/** A value that a careful shop would measure: near the middle of its limits. */
function measured(line: AcceptanceLine, miss: boolean) {
  const base = {
    lineId: line.id,
    uncertainty: 0,
    passed: null,
    instrument: '',
    calibrationDate: '',
    note: '',
  };
  const { nominal, low, high } = line;
  if (nominal === null && low === null && high === null) return { ...base, value: null, passed: true };
  if (line.kind === 'inductance') {
    const value = miss ? (high ?? nominal ?? 0) * 1.04 : (nominal ?? low ?? 0) * 1.006;
    return {
      ...base,
      value,
      uncertainty: value * 0.004,
      instrument: 'LCR meter, four-wire fixture',
      calibrationDate: '2026-04-14',
    };
  }
  return { ...base, value: nominal ?? ((low ?? 0) + (high ?? 0)) / 2, instrument: 'Shop instrument' };
}

export async function record(
  world: SeedWorld,
  shop: Shop,
  orderId: string,
  options: { miss?: boolean } = {},
): Promise<void> {
  const specification = await orderSpecificationOf(world.db, orderId);
  const { requirement, check } = JSON.parse(specification.body) as {
    requirement: Requirement;
    check: CheckResult | null;
  };
  const lines = resolveAcceptance(requirement.acceptance, check?.proposedAcceptance ?? []);
  const body: AsBuiltBody = {
    values: lines.map((line) => measured(line, options.miss ?? false)),
    testFrequency: lines.find((line) => line.kind === 'inductance')?.testFrequency ?? null,
    temperatureC: 21,
    leadState: 'leads as fitted, no part in the coil',
    compensation: 'open and short',
    measuredOn: dateIn('Europe/Berlin', await businessNow(world.db)),
    note: '',
  };
  for (const piece of await piecesOf(world.db, orderId)) {
    const certificate = await world.upload(
      shop.builder,
      shop.id,
      'certificate',
      `${piece.serial}-pressure-test.pdf`,
      'application/pdf',
      await plainPdf('Hydrostatic test', [
        `Serial ${piece.serial}`,
        'Held without loss. Invented for the demo.',
      ]),
    );
    await enterRecord(world.db, shop.builder, {
      pieceId: piece.id,
      body,
      photos: [],
      certificates: [certificate],
      commandId: world.command(),
    });
  }
  await world.settle();
}
