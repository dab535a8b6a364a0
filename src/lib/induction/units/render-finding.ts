/** Findings as sentences in a person's unit set. */
import type { Finding, Quantity } from '../check/types.ts';
import type { UnitSet } from './dimensions.ts';
import { formatQuantity } from './format-quantity.ts';

/** What is needed of a finding to say it. */
export type FindingText = Pick<Finding, 'template' | 'values'>;

/**
 * Fills the `{name}` places of a finding's template with its values in the person's units. `{name:%}` shows a plain
 * fraction as per cent, `{name:m}` a length as a distance (m or ft).
 *
 * @example renderFinding({ template: 'Gap is {gap}.', values: { gap: { value: 0.002, unit: 'm' } } }, 'inch')
 *   // "Gap is 0.07874 in."
 */
export function renderFinding(finding: FindingText, unitSet: UnitSet): string {
  return renderTemplate(finding.template, finding.values, unitSet);
}

export function renderTemplate(template: string, values: Record<string, Quantity>, unitSet: UnitSet): string {
  return template.replace(/\{(\w+)(?::([%m]))?\}/g, (place, name: string, style: string | undefined) => {
    const quantity = values[name];
    if (!quantity) return place;
    const dimension = style === '%' ? 'fraction' : style === 'm' ? 'distance' : undefined;
    // Sentences carry three digits; more would claim what the check does not know.
    return formatQuantity(quantity.value, quantity.unit, unitSet, null, { dimension, digits: 3 });
  });
}
