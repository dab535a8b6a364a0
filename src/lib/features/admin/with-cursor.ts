/** The same list with another cursor. */
export function withCursor(
  path: string,
  filter: Record<string, string | null>,
  after: string | null,
): string {
  const query = new URLSearchParams();
  for (const [name, value] of Object.entries({ ...filter, after })) if (value) query.set(name, value);
  return query.size > 0 ? `${path}?${query}` : path;
}
