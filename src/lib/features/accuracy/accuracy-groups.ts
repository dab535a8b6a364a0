/** The groups of the accuracy page: what is compared, and what agreement there proves. */

export const comparisons = {
  solver: 'Solver against solver',
  handbook: 'Against handbooks and standards',
} as const;

export interface AccuracyGroup {
  id: string;
  comparison: keyof typeof comparisons;
  title: string;
  /** One sentence: what it proves, and what not. */
  proves: string;
}

export const accuracyGroups = [
  {
    id: 'coil-alone',
    comparison: 'solver',
    title: 'The coil alone',
    proves:
      'Inductance and resistance of bare coils agree with finite elements and with the limit of a perfect conductor, at all three settings of the solution.',
  },
  {
    id: 'coil-with-part',
    comparison: 'solver',
    title: 'The coil with its part',
    proves:
      'Loaded inductance, resistance and the share of the part agree with finite elements on the true tube sections, for parts of one given resistivity and permeability.',
  },
  {
    id: 'filaments',
    comparison: 'solver',
    title: 'A model of another kind',
    proves:
      'Conductors cut into many thin rings, with mathematics of their own, give the same coil; the limits are those of the rings.',
  },
  {
    id: 'closed-solutions',
    comparison: 'solver',
    title: 'Skin effect in closed form',
    proves: 'Cylinders, tubes, wires and flat walls follow the exact Bessel and Kelvin functions.',
  },
  {
    id: 'inductance',
    comparison: 'solver',
    title: 'Inductance and proximity formulas',
    proves:
      'Rings, current sheets, straight leads and wire paths give the classical inductance formulas; Medhurst’s measured table is met within its own scatter.',
  },
  {
    id: 'steel',
    comparison: 'solver',
    title: 'Magnetic steel',
    proves:
      'The first-harmonic permeability gives the power of a solution step by step in time for one saturation curve; it does not prove the curve of a particular steel, which differs by several per cent from heat to heat.',
  },
  {
    id: 'heating',
    comparison: 'solver',
    title: 'Heating of a bar',
    proves:
      'Surface, mean and core temperatures over time agree with a fine solution of the same equations, for heat that is given.',
  },
  {
    id: 'circuits',
    comparison: 'solver',
    title: 'Tank circuits',
    proves:
      'Frequency, voltages, currents and losses of a tank agree with a circuit program and with nodal analysis, for coil values that are given.',
  },
  {
    id: 'materials',
    comparison: 'handbook',
    title: 'Material data',
    proves:
      'The tables the check reads are those of the named standards; it does not prove that a bar meets them.',
  },
  {
    id: 'water',
    comparison: 'handbook',
    title: 'Cooling water',
    proves:
      'Properties, friction and heat transfer follow the named correlations, which for coiled tube differ among themselves by about a fifth.',
  },
  {
    id: 'tube',
    comparison: 'handbook',
    title: 'Tube sizes, pressure and brazing filler',
    proves: 'Stock sizes, Barlow’s pressure and melting ranges are those of the named standards.',
  },
  {
    id: 'exposure',
    comparison: 'handbook',
    title: 'Reference levels for people',
    proves:
      'The levels and the stray field of a coil are computed as published; whether a place is safe is for a measurement on site.',
  },
] as const satisfies readonly AccuracyGroup[];

export type AccuracyGroupId = (typeof accuracyGroups)[number]['id'];
