/** What an address of a company is for. */
export const addressPurposes = ['delivery', 'invoice', 'works'] as const;
export type AddressPurpose = (typeof addressPurposes)[number];
export const addressPurposeText: Record<AddressPurpose, string> = {
  delivery: 'Delivery',
  invoice: 'Invoices',
  works: 'Works',
};
