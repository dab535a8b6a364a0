/** The figures of a check by subject, as names and values for people. Pure, so that papers and screens agree. */
import type { CheckResult, Figure, LadderRow } from '$lib/induction/check/types.ts';
import type { Dimension, UnitSet } from '$lib/induction/units/dimensions.ts';
import { formatFigure, formatQuantity } from '$lib/induction/units/format-quantity.ts';

export interface FigureLine {
  name: string;
  value: string;
  /** "19.5 to 20.5 kHz"; empty where the value has no band. */
  range: string;
  note: string;
}

export interface FigureGroup {
  title: string;
  lines: FigureLine[];
}

const limiterText: Record<LadderRow['hot']['limitedBy'], string> = {
  'rated-power': 'rated power',
  voltage: 'inverter voltage',
  current: 'inverter current',
  bank: 'capacitor bank',
  coil: 'coil',
};

/** What keeps the power of a row from being higher. */
export function limiterOf(row: LadderRow['hot']): string {
  return limiterText[row.limitedBy];
}

/** The rows worth reading first: fitted, advised, and those whose frequency lies in the supply's range. */
export function nearRows(rows: readonly LadderRow[]): LadderRow[] {
  return rows.filter((row) => row.fitted || row.advised || row.fits || (row.cold.inBand && row.hot.inBand));
}

/** The row that is fitted now, or the advised one where none is. */
export function fittedRow(result: CheckResult): LadderRow | undefined {
  return result.ladder.find((row) => row.fitted) ?? result.ladder.find((row) => row.advised);
}

type Entry = [name: string, figure: Figure | null | undefined, note?: string, dimension?: Dimension];

function contributors(figure: Figure): string {
  const names = figure.contributors.map((one) => one.name);
  return names.length === 0 ? '' : `Band mostly from ${names.join(', ')}.`;
}

function lines(entries: readonly Entry[], unitSet: UnitSet, withContributors = true): FigureLine[] {
  return entries.flatMap(([name, figure, note = '', dimension]) => {
    if (!figure) return [];
    // Nominal figures of the preview come without a band; three digits claim no more than they know.
    const banded = figure.high - figure.low > 1e-3 * Math.abs(figure.value);
    const shown = banded
      ? formatFigure(figure, unitSet, { dimension })
      : {
          value: formatQuantity(figure.value, figure.unit, unitSet, null, { dimension, digits: 3 }),
          range: '',
        };
    return [
      {
        name,
        value: shown.value,
        range: shown.range,
        note: [note, withContributors ? contributors(figure) : ''].filter(Boolean).join(' '),
      },
    ];
  });
}

/** The handful of figures that decide: they stand first and alone. */
export function headlines(result: CheckResult, unitSet: UnitSet): FigureLine[] {
  const { tank, cold, hot, bare } = result;
  const limit = fittedRow(result)?.hot;
  return lines(
    [
      [
        'Operating frequency',
        tank?.operatingFrequency ?? null,
        tank ? `resonance cold ${formatFigure(tank.resonanceCold, unitSet).value}` : '',
      ],
      [
        'Deliverable power',
        tank?.deliverablePower,
        limit === undefined ? '' : `limited by the ${limiterOf(limit)}`,
      ],
      ['Efficiency of the coil, hot', hot?.efficiency ?? cold?.efficiency, '', 'fraction'],
      ['Time to target', result.heating?.timeAtDeliverablePower],
      ['Bare inductance', bare?.inductance],
      ['Water flow', result.water?.flow],
    ],
    unitSet,
    false,
  );
}

function plain(
  unitSet: UnitSet,
  name: string,
  value: number | null | undefined,
  unit: 'm' | 'Pa' | '1',
): FigureLine[] {
  if (value === null || value === undefined) return [];
  return [{ name, value: formatQuantity(value, unit, unitSet, null, { digits: 3 }), range: '', note: '' }];
}

function coilLines({ bare, cold, hot, leads }: CheckResult, unitSet: UnitSet): FigureLine[] {
  const at = (hertz: number | undefined) =>
    hertz === undefined ? '' : `at ${formatQuantity(hertz, 'Hz', unitSet, null, { digits: 3 })}`;
  return lines(
    [
      ['Bare inductance', bare?.inductance, at(bare?.frequency)],
      ['Bare resistance', bare?.resistance, at(bare?.frequency)],
      ['Bare Q', bare?.q],
      ['Inductance with part, cold', cold?.inductance, at(cold?.frequency)],
      ['Inductance with part, hot', hot?.inductance, at(hot?.frequency)],
      ['Resistance with part, cold', cold?.resistance],
      ['Resistance with part, hot', hot?.resistance],
      ['Q with part, hot', hot?.q],
      ['Efficiency, cold', cold?.efficiency, '', 'fraction'],
      ['Efficiency, hot', hot?.efficiency, '', 'fraction'],
      ['Inductance of the leads', leads?.inductance],
    ],
    unitSet,
  );
}

function tankLines({ tank }: CheckResult, unitSet: UnitSet): FigureLine[] {
  return lines(
    [
      ['Inductance the bank sees', tank?.inductance, tank ? `referred to the ${tank.referredTo}` : ''],
      ['Resonance, cold', tank?.resonanceCold],
      ['Resonance, hot', tank?.resonanceHot],
      ['Operating frequency', tank?.operatingFrequency],
      ['Q of the tank', tank?.q],
      ['Deliverable power', tank?.deliverablePower],
      ['Coil current', tank?.coilCurrent],
      ['Coil voltage', tank?.coilVoltage],
      ['Coil voltage to the tap', tank?.coilVoltageToTap],
      ['Bank current', tank?.bankCurrent],
      ['Reactive power', tank?.reactivePower],
      ['Loss in the bank', tank?.bankLoss],
      ['Loss in the transformer', tank?.transformerLoss],
    ],
    unitSet,
  );
}

function heatingLines({ skin, heating }: CheckResult, unitSet: UnitSet): FigureLine[] {
  return [
    ...lines(
      [
        ['Skin depth in the part, cold', skin?.partCold],
        ['Skin depth in the part, hot', skin?.partHot],
        ['Skin depth in the copper', skin?.copper],
        ['Energy into the part', heating?.energy],
        ['Mean power needed', heating?.meanPowerNeeded],
        ['Time at deliverable power', heating?.timeAtDeliverablePower],
        ['Loss from the surface', heating?.surfaceLoss],
      ],
      unitSet,
    ),
    ...plain(unitSet, 'Diameter over skin depth, cold', skin?.diameterOverDepthCold, '1'),
    ...plain(unitSet, 'Diameter over skin depth, hot', skin?.diameterOverDepthHot, '1'),
  ];
}

function waterLines({ water }: CheckResult, unitSet: UnitSet): FigureLine[] {
  return [
    ...lines(
      [
        ['Heat to carry away', water?.duty],
        ['Flow', water?.flow],
        ['Velocity', water?.velocity],
        ['Temperature rise', water?.temperatureRise],
        ['Outlet temperature', water?.outletTemperature],
        ['Wall temperature', water?.wallTemperature],
        ['Pressure drop', water?.pressureDrop],
      ],
      unitSet,
    ),
    ...plain(unitSet, 'Water circuits advised', water?.circuitsAdvised, '1'),
  ];
}

function aroundLines({ mechanics, surroundings }: CheckResult, unitSet: UnitSet): FigureLine[] {
  return [
    ...plain(unitSet, 'Clear distance between turns', mechanics?.clearanceBetweenTurns, 'm'),
    ...plain(unitSet, 'Clearance to the part, cold', mechanics?.radialClearanceCold, 'm'),
    ...plain(unitSet, 'Clearance to the part, hot', mechanics?.radialClearanceHot, 'm'),
    ...plain(unitSet, 'Wall after bending', mechanics?.wallAfterBending, 'm'),
    ...plain(unitSet, 'Test pressure', mechanics?.testPressure, 'Pa'),
    ...lines(
      [
        ['Working pressure rating', mechanics?.workingPressureRating],
        ['Keep-out distance', surroundings?.keepOutDistance, surroundings?.referenceName, 'distance'],
        ...(surroundings?.points ?? []).map((point): Entry => [
          `Flux density: ${point.name}`,
          point.fluxDensity,
        ]),
      ],
      unitSet,
    ),
  ];
}

/** Every figure the check gave, grouped. */
export function figureGroups(result: CheckResult, unitSet: UnitSet): FigureGroup[] {
  return [
    { title: 'Coil', lines: coilLines(result, unitSet) },
    { title: 'Tank', lines: tankLines(result, unitSet) },
    { title: 'Heating', lines: heatingLines(result, unitSet) },
    { title: 'Water', lines: waterLines(result, unitSet) },
    { title: 'Mechanics and surroundings', lines: aroundLines(result, unitSet) },
  ].filter((group) => group.lines.length > 0);
}
