/** The one function of the check. */
import { methodVersion } from '../version.ts';
import { proposedAcceptance } from './acceptance.ts';
import { examine } from './examine.ts';
import { findingsOf } from './findings/all.ts';
import type { CheckOptions } from './solver.ts';
import type { CheckResult, Requirement } from './types.ts';

/**
 * Checks a requirement: figures with bands, bank ladder, findings, proposed acceptance.
 *
 * Pure: the same requirement, setting and method version give the same result on the same engine. Whatever was entered,
 * it answers with findings and leaves figures null that the method cannot give; it throws only `CheckStoppedError`,
 * when `shouldStop` asked for it, and for faults of its own.
 *
 * @param options.setting preview (while typing), default (what is stored) or fine
 * @param options.onProgress called with the share of the work done, 0 to 1
 * @param options.shouldStop asked between field solutions
 * @param options.bands false: nominal figures only, bands from the method's error alone
 * @example checkRequirement(exampleRequirement(), { setting: 'default' }).tank?.operatingFrequency.value
 */
export function checkRequirement(requirement: Requirement, options: CheckOptions): CheckResult {
  const context = examine(requirement, options);
  return {
    methodVersion,
    setting: options.setting,
    resolved: context.resolved,
    bare: context.bare,
    bareAtTest: context.bareAtTest,
    cold: context.cold,
    hot: context.hot,
    leads: context.leads,
    tank: context.tank,
    chain: context.chain,
    skin: context.skin,
    heating: context.heating,
    water: context.water,
    mechanics: context.mechanics,
    surroundings: context.surroundings,
    shop: context.shop,
    ladder: context.ladder,
    proposedAcceptance: proposedAcceptance(context),
    findings: findingsOf(context),
    sanity: context.sanity,
  };
}

export { CheckStoppedError, type CheckOptions } from './solver.ts';
