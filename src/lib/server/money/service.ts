import { createPayments, type Payments } from '../adapters/payments.ts';
import { config } from '../config/index.ts';

let shared: Payments | undefined;
let given: Payments | undefined;

/** The payment service of this process, made at first use. */
export function paymentService(): Payments {
  if (given) return given;
  shared ??= createPayments(config().payments);
  return shared;
}

/** For tests and commands that bring their own; `undefined` goes back to the configured one. */
export function usePaymentService(payments: Payments | undefined): void {
  given = payments;
}
