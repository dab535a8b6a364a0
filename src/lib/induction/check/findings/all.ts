/** Every rule of the check, and the order in which findings are shown. */
import type { CheckContext, Rule } from '../context.ts';
import type { Finding, Severity } from '../types.ts';
import { narrowBand, wideBand } from './acceptance.ts';
import { assumedValues } from './assumptions.ts';
import { missingConnection, missingHanding } from './connection.ts';
import { curieCrossing, frequencyForDepth, nearMelting, partTooThin, surfaceOverheats } from './depth.ts';
import {
  capacitorLimits,
  coilCurrent,
  coilVoltage,
  tapUnbalanced,
  transformerLimit,
} from './electrical-limits.ts';
import { frequencyBand, noRowFits } from './frequency.ts';
import { gapLarge, gapSmall, turnInsulation } from './gaps.ts';
import { impossibleDimensions } from './dimensions.ts';
import {
  disagreeingMass,
  notCoupling,
  openTurns,
  outsideMethod,
  touchingPart,
  touchingTurns,
} from './geometry.ts';
import { loadMismatch, lowEfficiency, powerShort, qOutOfRange, timeShort } from './power.ts';
import { chokeSaturates, deviceVoltage, pushPullOverload, startUp } from './push-pull.ts';
import { fieldAtOperator, fixtureOverheats, metalInField } from './surroundings.ts';
import {
  leadsDominate,
  notStocked,
  testPressureHigh,
  thinWall,
  tightBend,
  workingPressureHigh,
} from './tube.ts';
import { unitDoubts } from './unit-doubt.ts';
import {
  belowInterlock,
  noWater,
  waterFast,
  waterHot,
  waterLaminar,
  waterPressureShort,
  waterShort,
} from './water.ts';

export const rules: readonly Rule[] = [
  impossibleDimensions,
  unitDoubts,
  openTurns,
  touchingTurns,
  touchingPart,
  notCoupling,
  outsideMethod,
  disagreeingMass,
  frequencyBand,
  noRowFits,
  loadMismatch,
  powerShort,
  timeShort,
  capacitorLimits,
  transformerLimit,
  coilVoltage,
  coilCurrent,
  tapUnbalanced,
  partTooThin,
  frequencyForDepth,
  surfaceOverheats,
  nearMelting,
  curieCrossing,
  gapSmall,
  gapLarge,
  turnInsulation,
  thinWall,
  tightBend,
  notStocked,
  leadsDominate,
  missingConnection,
  missingHanding,
  waterShort,
  waterPressureShort,
  noWater,
  waterHot,
  waterFast,
  waterLaminar,
  belowInterlock,
  workingPressureHigh,
  testPressureHigh,
  lowEfficiency,
  qOutOfRange,
  metalInField,
  fixtureOverheats,
  fieldAtOperator,
  wideBand,
  narrowBand,
  deviceVoltage,
  chokeSaturates,
  startUp,
  pushPullOverload,
  assumedValues,
];

const rank: Record<Severity, number> = { blocker: 0, caution: 1, note: 2 };

/** All findings, blockers first; one per code and subject. */
export function findingsOf(context: CheckContext): Finding[] {
  const seen = new Set<string>();
  return rules
    .flatMap((rule) => rule(context))
    .filter((one) => {
      const key = `${one.code}:${one.subject}`;
      if (seen.has(key)) return false;
      seen.add(key);
      return true;
    })
    .sort((a, b) => rank[a.severity] - rank[b.severity]);
}
