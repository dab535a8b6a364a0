/**
 * One CSV cell (RFC 4180). Text that a spreadsheet would take for a formula (= + - @, tab, return) gets an
 * apostrophe in front; plain numbers, negative ones too, stay numbers.
 */
export function csvCell(value: string): string {
  const isNumber = /^-?\d+(\.\d+)?$/.test(value);
  const safe = !isNumber && /^[=+\-@\t\r]/.test(value) ? `'${value}` : value;
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

export function csvOf(head: readonly string[], rows: readonly (readonly string[])[]): string {
  return [head, ...rows].map((row) => row.map(csvCell).join(',')).join('\r\n') + '\r\n';
}
