import type { AcceptanceLine } from './types.ts';

const open = (line: AcceptanceLine) => line.nominal === null && line.low === null && line.high === null;

/**
 * The acceptance lines with their limits: a line whose basis is *computed* and that carries no figures
 * takes them from the checker's proposal of the same kind (figures, test frequency, conditions). Lines
 * with the buyer's own values, documents and yes/no tests stay as they are. SI units.
 */
export function resolveAcceptance(
  lines: readonly AcceptanceLine[],
  proposed: readonly AcceptanceLine[],
): AcceptanceLine[] {
  return lines.map((line) => {
    if (line.basis !== 'computed' || !open(line)) return line;
    const figures = proposed.find((other) => other.kind === line.kind);
    if (!figures) return line;
    return {
      ...line,
      nominal: figures.nominal,
      low: figures.low,
      high: figures.high,
      testFrequency: line.testFrequency ?? figures.testFrequency,
      temperatureC: line.temperatureC ?? figures.temperatureC,
      measuringPlane: line.measuringPlane || figures.measuringPlane,
      leadState: line.leadState || figures.leadState,
      holdTime: line.holdTime ?? figures.holdTime,
      differentialPressure: line.differentialPressure ?? figures.differentialPressure,
      note: line.note || figures.note,
    };
  });
}
