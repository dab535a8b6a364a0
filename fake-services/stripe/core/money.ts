import { invalidParam } from './errors.ts';

/** Smallest charge per currency, in minor units, of the currencies this product uses. */
const MINIMUM_CHARGE: Record<string, number> = { eur: 50, usd: 50, gbp: 30 };
const MAXIMUM_CHARGE = 99_999_999;

/**
 * Processing fee of a card payment, in minor units: a share of the amount (half up) and a fixed part. The
 * figures are of the order of published European and US card prices (common practice); the product reads the
 * fee from the balance transaction and never computes it.
 */
const FEES: Record<string, { perMille: number; fixed: number }> = {
  eur: { perMille: 15, fixed: 25 },
  gbp: { perMille: 15, fixed: 20 },
  usd: { perMille: 29, fixed: 30 },
};

export const DISPUTE_FEE: Record<string, number> = { eur: 2000, gbp: 2000, usd: 1500 };

export function assertCurrency(currency: string, param = 'currency'): void {
  if (!(currency in MINIMUM_CHARGE)) {
    throw invalidParam(
      'parameter_invalid_string',
      `Invalid currency: ${currency}. This stand-in knows: ${Object.keys(MINIMUM_CHARGE).join(', ')}`,
      param,
    );
  }
}

export function assertChargeable(amount: number, currency: string, param: string): void {
  assertCurrency(currency);
  if (amount < (MINIMUM_CHARGE[currency] ?? 50)) {
    throw invalidParam(
      'amount_too_small',
      `Amount must be at least ${formatAmount(MINIMUM_CHARGE[currency] ?? 50, currency)}`,
      param,
    );
  }
  if (amount > MAXIMUM_CHARGE) {
    throw invalidParam(
      'amount_too_large',
      `Amount must be no more than ${formatAmount(MAXIMUM_CHARGE, currency)}`,
      param,
    );
  }
}

export function assertPositive(amount: number, param = 'amount'): void {
  if (amount < 1)
    throw invalidParam('parameter_invalid_integer', 'This value must be greater than or equal to 1.', param);
}

export function processingFee(amount: number, currency: string): number {
  const fee = FEES[currency] ?? { perMille: 15, fixed: 25 };
  return Math.floor((amount * fee.perMille + 500) / 1000) + fee.fixed;
}

export function formatAmount(amount: number, currency: string): string {
  return new Intl.NumberFormat('en-GB', { style: 'currency', currency: currency.toUpperCase() }).format(
    amount / 100,
  );
}
