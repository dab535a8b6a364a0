/**
 * Version of the method, stored with every check: raised whenever a figure, a band or a finding can change for the
 * same input. Form: year, month, running number.
 */
export const methodVersion = '2026.12.2';
