/** Making findings: margin and metric message from the parts, so that no rule writes them by hand. */
import { renderTemplate } from '../../units/render-finding.ts';
import type { Finding, FindingCode, Fix, Quantity, Severity, Unit } from '../types.ts';

export interface FindingParts {
  code: FindingCode;
  severity: Severity;
  /** A safety matter: as a blocker it cannot be carried by the buyer. Default false. */
  safety?: boolean;
  subject: string;
  figure?: Quantity | null;
  limit?: Quantity | null;
  /** True where more is better: the margin is then (figure − limit)/limit. */
  limitIsLeast?: boolean;
  template: string;
  values?: Record<string, Quantity>;
  remedy: string;
  fixes?: Fix[];
  /** Where the rule comes from. */
  source: string;
}

export const quantity = (value: number, unit: Unit): Quantity => ({ value, unit });

/** The habit of the trade, where no standard is known to us. */
export const commonPractice = 'common practice';

export function finding(parts: FindingParts): Finding {
  const { figure = null, limit = null, values = {} } = parts;
  const known: Record<string, Quantity> = {
    ...(figure ? { figure } : {}),
    ...(limit ? { limit } : {}),
    ...values,
  };
  const margin =
    figure && limit && limit.value !== 0
      ? ((limit.value - figure.value) / Math.abs(limit.value)) * (parts.limitIsLeast ? -1 : 1)
      : null;
  return {
    code: parts.code,
    severity: parts.severity,
    safety: parts.safety ?? false,
    subject: parts.subject,
    figure,
    limit,
    margin,
    template: parts.template,
    values: known,
    message: renderTemplate(parts.template, known, 'metric'),
    remedy: parts.remedy,
    fixes: parts.fixes ?? [],
    source: parts.source,
  };
}
