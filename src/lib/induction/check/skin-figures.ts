/** Skin depth in copper and part, cold and hot. */
import { MU0, skinDepth } from '../constants/physical.ts';
import { relativePermeability } from '../materials/magnetisation.ts';
import { copperResistivity } from '../materials/material-of.ts';
import type { Material } from '../materials/types.ts';
import { figure, type Effect } from './figure.ts';
import type { Coil, Figure, Process, SkinFigures, Workpiece } from './types.ts';

export interface SkinInput {
  coil: Coil;
  part: Workpiece;
  process: Process;
  material: Material;
  frequencyCold: number;
  frequencyHot: number;
  /** Peak field strength at the part's surface, A/m, cold. */
  surfaceField: number;
}

/** Size that the skin depth is compared with: the diameter of a solid part, twice the wall of a hollow one, m. */
export const couplingSize = (part: Workpiece): number =>
  part.insideDiameter > 0
    ? part.outsideDiameter - part.insideDiameter
    : part.form === 'disc'
      ? Math.min(part.outsideDiameter, 2 * part.length)
      : part.outsideDiameter;

export function skinFigures(input: SkinInput): SkinFigures {
  const { coil, part, process, material } = input;
  const size = couplingSize(part);
  const copperC = coil.copperTemperatureC ?? 40;
  const rho = (t: number) => material.resistivity(t);
  const scatter = material.records.resistivity.uncertainty;
  const depth = (resistivity: number, frequency: number, mu: number, muScatter: number): Figure => {
    const value = skinDepth(resistivity, frequency, mu);
    const effects: Effect[] = [
      { name: 'resistivity', variation: { value: scatter, unit: '1' }, change: (value * scatter) / 2 },
      { name: 'permeability', variation: { value: muScatter, unit: '1' }, change: (value * muScatter) / 2 },
    ];
    return figure(value, 'm', 'δ = √(ρ/(π f μ0 μr))', effects, { least: 0 });
  };
  const muCold = relativePermeability(material, process.startTemperatureC, input.surfaceField);
  const muHot = relativePermeability(material, process.targetTemperatureC, input.surfaceField);
  const partCold = depth(rho(process.startTemperatureC), input.frequencyCold, muCold, muCold > 1 ? 0.2 : 0);
  const partHot = depth(rho(process.targetTemperatureC), input.frequencyHot, muHot, muHot > 1 ? 0.2 : 0);
  if (muCold > 1)
    partCold.assumptions.push(`Relative permeability ${muCold.toPrecision(2)} at the surface field.`);
  const copper = skinDepth(copperResistivity(coil.copperGrade, copperC), input.frequencyHot);
  return {
    copper: figure(copper, 'm', 'δ = √(ρ/(π f μ0))', [
      { name: 'copper temperature', variation: { value: 20, unit: 'K' }, change: copper * 0.036 },
    ]),
    partCold,
    partHot,
    diameterOverDepthCold: size / partCold.value,
    diameterOverDepthHot: size / partHot.value,
  };
}

/**
 * Peak field at the part's surface from the power that arrives: P = A·(H_pk²/2)·ρ/δ with δ from the same field, solved
 * for H with μr ≈ 1 + Bs/(μ0·H) by fixed point. Only for the skin depth shown.
 */
export function surfaceFieldOf(
  power: number,
  area: number,
  resistivity: number,
  frequency: number,
  saturation: number | null,
): number {
  let h = 1e5;
  for (let i = 0; i < 60; i++) {
    const mu = saturation === null ? 1 : 1 + saturation / (MU0 * h);
    const delta = skinDepth(resistivity, frequency, mu);
    const next = Math.sqrt((2 * power * delta) / (area * resistivity));
    if (!Number.isFinite(next) || next <= 0) return 1e5;
    if (Math.abs(next / h - 1) < 1e-6) return next;
    h = Math.sqrt(h * next);
  }
  return h;
}
