/** Figures with bands: effects of independent tolerances added in quadrature, the largest three named. */
import type { BandContributor, Figure, Quantity, Unit } from './types.ts';

/** What one tolerance does to a figure, as a signed change of its value for the upper end of the tolerance. */
export interface Effect {
  name: string;
  variation: Quantity;
  change: number;
}

export interface FigureOptions {
  assumptions?: string[];
  /** Physical ends of the value, e.g. 0 and 1 of an efficiency. */
  least?: number;
  most?: number;
}

/** A figure from its effects. Effects that are not finite are left out: a missing contributor never hides a value. */
export function figure(
  value: number,
  unit: Unit,
  method: string,
  effects: readonly Effect[] = [],
  options: FigureOptions = {},
): Figure {
  const real = effects.filter((effect) => Number.isFinite(effect.change) && effect.change !== 0);
  const half = Math.sqrt(real.reduce((sum, effect) => sum + effect.change ** 2, 0));
  const contributors: BandContributor[] = [...real]
    .sort((a, b) => Math.abs(b.change) - Math.abs(a.change))
    .slice(0, 3)
    .map((effect) => ({
      name: effect.name,
      variation: effect.variation,
      effect: value === 0 ? 0 : effect.change / value,
    }));
  return {
    value,
    low: Math.max(options.least ?? -Number.MAX_VALUE, value - half),
    high: Math.min(options.most ?? Number.MAX_VALUE, value + half),
    unit,
    method,
    assumptions: options.assumptions ?? [],
    contributors,
  };
}

/** A figure whose band is one stated share of it. */
export function figureWithin(
  value: number,
  share: number,
  unit: Unit,
  method: string,
  assumptions: string[] = [],
): Figure {
  const half = Math.abs(value) * share;
  return { ...figure(value, unit, method, [], { assumptions }), low: value - half, high: value + half };
}

/** Half width of a figure's band. */
export const halfBand = (f: Figure): number => (f.high - f.low) / 2;
