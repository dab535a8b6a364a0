import type { Section } from '../coil/section.ts';
import { InductionInputError } from '../input-error.ts';
import type { Body, Boundary } from './boundary.ts';
import type { ComplexMatrix } from './complex-dense.ts';

export function rectangularTubeOperator(
  _b: Boundary,
  _body: Body,
  _section: Section & { kind: 'rectangular' },
  _resistivity: number,
  _frequency: number,
): ComplexMatrix {
  throw new InductionInputError('outside-method', 'coil.tube', 'Rectangular tubes are not solved yet.');
}
