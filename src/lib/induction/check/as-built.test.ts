import { beforeAll, describe, expect, it } from 'vitest';
import type { AsBuiltEntry, AsBuiltRecord } from './as-built-types.ts';
import { judgeAsBuilt, verdictOf, withMeasuredDimensions } from './as-built.ts';
import { checkRequirement } from './check-requirement.ts';
import { fitExistingCoil } from './existing-coil.ts';
import { plainRequirement } from './findings/case-context.ts';
import { proposeCandidates } from './propose.ts';
import { CheckStoppedError } from './solver.ts';
import type { AcceptanceLine, CheckResult, Requirement } from './types.ts';

const preview = { setting: 'preview', bands: false } as const;
const line = (change: Partial<AcceptanceLine>): AcceptanceLine => ({
  ...(plainRequirement().acceptance[0] as AcceptanceLine),
  basis: 'buyer',
  ...change,
});

function ordered(): Requirement {
  const requirement = plainRequirement();
  requirement.acceptance = [
    ...requirement.acceptance,
    line({
      id: 'bore',
      kind: 'inside-diameter',
      label: 'Clear opening',
      nominal: 0.048,
      low: 0.0475,
      high: 0.0485,
      unit: 'm',
    }),
    line({
      id: 'hydro',
      kind: 'hydrostatic',
      label: 'Hydrostatic test',
      nominal: 6e5,
      low: 6e5,
      high: null,
      unit: 'Pa',
    }),
    line({
      id: 'photo',
      kind: 'document',
      label: 'Photographs',
      nominal: null,
      low: null,
      high: null,
      unit: '1',
    }),
  ];
  return requirement;
}

const entry = (lineId: string, value: number | null, change: Partial<AsBuiltEntry> = {}): AsBuiltEntry => ({
  lineId,
  value,
  unit: '1',
  uncertainty: 0,
  passed: null,
  testFrequency: null,
  note: '',
  ...change,
});

describe('as-built record', () => {
  let check: CheckResult;
  const requirement = ordered();
  beforeAll(() => {
    check = checkRequirement(requirement, preview);
  });
  const record = (
    change: Partial<AsBuiltRecord> = {},
    inductance = check.bareAtTest?.inductance.value ?? 0,
  ): AsBuiltRecord => ({
    instrument: 'LCR meter',
    calibrationDate: '2026-03-01',
    compensation: 'open and short',
    temperatureC: 22,
    measuringPlane: 'contact faces',
    leadState: 'as fitted',
    entries: [
      entry('inductance', inductance, { uncertainty: 0.005 * inductance, testFrequency: 20e3 }),
      entry('bore', 0.0481, { uncertainty: 5e-5 }),
      entry('hydro', 6.5e5, { uncertainty: 1e4, passed: true }),
      entry('photo', null, { passed: true }),
    ],
    insideDiameter: null,
    pitch: null,
    ...change,
  });
  const judge = (r: AsBuiltRecord) => judgeAsBuilt(requirement, check, r, preview);

  it.each([
    [1, 0.9, 1.1, 0.01, 'pass'],
    [1.095, 0.9, 1.1, 0.01, 'pass-with-remark'],
    [1.105, 0.9, 1.1, 0.01, 'pass-with-remark'],
    [1.12, 0.9, 1.1, 0.01, 'fail'],
    [0.88, 0.9, null, 0.01, 'fail'],
    [5, null, null, 0, 'pass'],
  ] as const)('judges %s between %s and %s ± %s as %s', (value, low, high, uncertainty, verdict) => {
    expect(verdictOf(value, low, high, uncertainty)).toBe(verdict);
  });

  it('passes a coil as predicted, taking the limits of computed lines from the check', () => {
    const judged = judge(record());
    expect(judged.lines.map((one) => one.verdict)).toEqual(['pass', 'pass', 'pass', 'pass']);
    expect(judged.lines[0]?.low).toBeGreaterThan(0);
    expect(judged.overall).toBe('pass');
    expect(judged.comparisons[0]?.difference).toBeCloseTo(0, 9);
    expect(Math.abs(judged.correction.addedInductance)).toBeLessThan(1e-10);
  });

  it('fails a line that misses, a test stated as failed, and a document that is not there', () => {
    const r = record();
    r.entries = [
      entry('inductance', 2e-6),
      entry('bore', 0.05),
      entry('hydro', 6.5e5, { passed: false }),
      entry('photo', null, { passed: false }),
    ];
    expect(judge(r).lines.map((one) => one.verdict)).toEqual(['fail', 'fail', 'fail', 'fail']);
  });

  it('is incomplete while a value is missing', () => {
    const r = record();
    r.entries = r.entries.slice(0, 3);
    expect(judge(r).overall).toBe('incomplete');
  });

  it('solves measured dimensions again and takes the rest as lead inductance', () => {
    const judged = judge(record({ insideDiameter: 0.0485 }));
    expect(judged.correction.method).toBe('dimensions-and-leads');
    // A wider coil has more inductance, so that the same reading leaves less for the leads.
    expect(judged.correction.addedInductance).toBeLessThan(-5e-9);
    expect(withMeasuredDimensions(requirement, record({ pitch: 0.0133 }))?.coil.winding).toMatchObject({
      pitch: 0.0133,
    });
  });

  it('lowers the ladder’s frequencies for a coil of more inductance, by half its share of the tank', () => {
    const inductance = (check.bareAtTest?.inductance.value ?? 0) * 1.1;
    const judged = judge(record({}, inductance));
    expect(judged.correction.method).toBe('leads');
    const before = check.ladder.find((row) => row.fitted);
    const after = judged.ladder.find((row) => row.fitted);
    const tank = check.tank;
    if (!before || !after || !tank) throw new Error('the example has a fitted row');
    const share = (16 * judged.correction.addedInductance) / tank.inductance.value;
    expect(after.hot.frequency.value / before.hot.frequency.value).toBeCloseTo(1 / Math.sqrt(1 + share), 2);
    expect(after.hot.frequency.value).toBeLessThan(before.hot.frequency.value);
    expect(judged.advisedRow).not.toBeNull();
  });

  it('uses a ratio only where neither dimensions nor leads are known, and says so', () => {
    const without = { ...requirement, coil: { ...requirement.coil, leads: null } };
    const judged = judgeAsBuilt(without, check, record({}, 1e-6), preview);
    expect(judged.correction.method).toBe('ratio');
    expect(judged.correction.explanation).toContain('guess');
  });

  it('keeps the predicted ladder when nothing electrical was measured', () => {
    const r = record();
    r.entries = r.entries.slice(1);
    const judged = judge(r);
    expect(judged.correction.method).toBe('none');
    expect(judged.ladder).toBe(check.ladder);
  });
});

describe('existing coil', () => {
  it('finds the fixed inductance from the frequencies the check itself predicts', () => {
    const requirement = plainRequirement();
    const check = checkRequirement(requirement, { setting: 'default', bands: false });
    const rows = check.ladder.filter((row) => row.tap === requirement.machine.transformer?.fittedTap);
    const seen = [rows[3], rows[6]].flatMap((row) =>
      row
        ? [{ capacitance: row.capacitance, frequency: row.hot.frequency.value, loading: 'hot' as const }]
        : [],
    );
    const { result } = fitExistingCoil(requirement, seen, 0.005);
    expect(result.ok).toBe(true);
    if (!result.ok) return;
    const truth = requirement.machine.fixed.inductance ?? 0;
    // The tank's low Q and the magnetising inductance are only roughly taken off: within the band it states.
    expect(Math.abs(result.calibrated.fixedInductance - truth)).toBeLessThan(
      result.calibrated.fixedInductanceBand,
    );
  });

  it('refuses mixed states and nothing seen', () => {
    const requirement = plainRequirement();
    expect(fitExistingCoil(requirement, [], 0.005).result.ok).toBe(false);
    const mixed = [
      { capacitance: 1e-6, frequency: 2e4, loading: 'hot' as const },
      { capacitance: 2e-6, frequency: 1.5e4, loading: 'empty' as const },
    ];
    expect(fitExistingCoil(requirement, mixed, 0.005).result.ok).toBe(false);
  });
});

describe('proposals', () => {
  const open = () => {
    const requirement = plainRequirement();
    if (requirement.coil.winding.shape === 'helix') requirement.coil.winding.turns = null;
    return requirement;
  };

  it('fills the open turns and bank setting with up to five candidates without blocker', () => {
    const shares: number[] = [];
    const { candidates, obstacles } = proposeCandidates(open(), {
      limit: 4,
      onProgress: (share) => shares.push(share),
    });
    expect(obstacles).toEqual([]);
    expect(candidates.length).toBeGreaterThan(1);
    expect(candidates.length).toBeLessThanOrEqual(4);
    expect(new Set(candidates.map((one) => one.id)).size).toBe(candidates.length);
    for (const candidate of candidates) {
      expect(candidate.check.findings.filter((one) => one.severity === 'blocker')).toEqual([]);
      expect(candidate.requirement.coil.winding).toMatchObject({ turns: candidate.turns });
      expect(candidate.reason).not.toBe('');
      expect(candidate.check.ladder.find((row) => row.fitted)?.hot.inBand).toBe(true);
    }
    expect(shares.at(-1)).toBe(1);
  });

  it('says what stands in the way when there is none', () => {
    const requirement = open();
    requirement.machine.supply.frequencyMin = 900e3;
    requirement.machine.supply.frequencyMax = 910e3;
    const { candidates, obstacles } = proposeCandidates(requirement);
    expect(candidates).toEqual([]);
    expect(obstacles.length).toBeGreaterThan(0);
  });

  it('stops when asked', () => {
    expect(() => proposeCandidates(open(), { shouldStop: () => true })).toThrow(CheckStoppedError);
  });
});
