import { eq } from 'drizzle-orm';
import { z } from 'zod';
import type { AsBuiltBody, AsBuiltOutcome } from '../../domain/as-built.ts';
import type { AsBuiltRecord } from '../../induction/check/as-built-types.ts';
import { judgeAsBuilt } from '../../induction/check/as-built.ts';
import type { CheckResult, Requirement } from '../../induction/check/types.ts';
import { asBuiltRecord } from '../db/schema/orders.ts';
import { defineJob, type JobContext } from '../jobs/index.ts';
import { orderSpecificationOf } from './queries.ts';

/** The solve takes seconds: it is a job of the worker, never part of a request or a transaction. */
export const asBuiltOutcomeJob = defineJob({
  kind: 'as-built-outcome',
  schema: z.object({ recordId: z.string() }),
  maxAttempts: 3,
  leaseMs: 120_000,
  handler: async () => (await import('./as-built-outcome.ts')).asBuiltOutcomeHandler,
});

/** The record in the checker's own shape. */
export function recordForCheck(body: AsBuiltBody, requirement: Requirement): AsBuiltRecord {
  const measured = (kind: 'inside-diameter' | 'pitch') => {
    const line = requirement.acceptance.find((one) => one.kind === kind);
    return body.values.find((value) => value.lineId === line?.id)?.value ?? null;
  };
  return {
    instrument: body.values.map((value) => value.instrument).find((name) => name !== '') ?? '',
    calibrationDate: body.values.map((value) => value.calibrationDate).find((date) => date !== '') ?? '',
    compensation: body.compensation,
    temperatureC: body.temperatureC,
    measuringPlane: '',
    leadState: body.leadState,
    entries: body.values.map((value) => ({
      lineId: value.lineId,
      value: value.value,
      unit: requirement.acceptance.find((line) => line.id === value.lineId)?.unit ?? '1',
      uncertainty: value.uncertainty,
      passed: value.passed,
      testFrequency: body.testFrequency,
      note: value.note,
    })),
    insideDiameter: measured('inside-diameter'),
    pitch: measured('pitch'),
  };
}

/** The bank setting that tunes the coil as measured, and predicted against measured. */
export function outcomeOf(requirement: Requirement, check: CheckResult, body: AsBuiltBody): AsBuiltOutcome {
  const judged = judgeAsBuilt(requirement, check, recordForCheck(body, requirement));
  const row = judged.advisedRow;
  const predicted = check.ladder.find((one) => one.advised);
  return {
    explanation: judged.correction.explanation,
    advised: row && {
      label: row.label,
      reason: row.reason,
      capacitance: row.capacitance,
      frequencyHot: row.hot.frequency.value,
      deliverablePower: row.hot.deliverablePower.value,
      fits: row.fits,
      asPredicted: row.id === predicted?.id,
    },
    comparisons: judged.comparisons.map((one) => ({
      name: one.name,
      unit: one.predicted.unit,
      predicted: one.predicted.value,
      low: one.predicted.low,
      high: one.predicted.high,
      measured: one.measured,
    })),
  };
}

export async function asBuiltOutcomeHandler(
  payload: { recordId: string },
  context: JobContext,
): Promise<void> {
  const [row] = await context.db.select().from(asBuiltRecord).where(eq(asBuiltRecord.id, payload.recordId));
  if (!row || row.outcome !== null) return;
  const specification = await orderSpecificationOf(context.db, row.orderId);
  // Our own frozen text: requirement and figures as they were checked; old ones may have no figures.
  const { requirement, check } = JSON.parse(specification.body) as {
    requirement: Requirement;
    check?: CheckResult | null;
  };
  if (!check || !Array.isArray(check.ladder)) return;
  await context.db
    .update(asBuiltRecord)
    .set({ outcome: outcomeOf(requirement, check, row.body) })
    .where(eq(asBuiltRecord.id, row.id));
}
