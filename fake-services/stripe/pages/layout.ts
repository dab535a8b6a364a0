/** The hosted pages of the stand-in: plain, readable without scripts, clearly marked as local. */
export function escapeHtml(value: string): string {
  const entities: Record<string, string> = {
    '&': '&amp;',
    '<': '&lt;',
    '>': '&gt;',
    '"': '&quot;',
    "'": '&#39;',
  };
  return value.replace(/[&<>"']/g, (char) => entities[char] ?? char);
}

const STYLE = `
  :root { color-scheme: light dark; --ink: #20262b; --ground: #f3f1ec; --sheet: #fff; --rule: #8a8f91; --main: #1d4f63; --bad: #97231b; }
  @media (prefers-color-scheme: dark) { :root { --ink: #e8e6e1; --ground: #16191c; --sheet: #1f2428; --rule: #7d858a; --main: #8ccbe0; --bad: #f2a29b; } }
  * { box-sizing: border-box; }
  body { margin: 0; font: 16px/1.5 system-ui, sans-serif; color: var(--ink); background: var(--ground); }
  main { max-width: 34rem; margin: 2rem auto; padding: 1.5rem; background: var(--sheet); border: 1px solid var(--rule); }
  h1 { font-size: 1.4rem; margin: 0 0 .5rem; }
  h2 { font-size: 1.05rem; margin: 1.5rem 0 .25rem; }
  .note { border-left: 4px solid var(--main); padding: .25rem .75rem; margin: 0 0 1.25rem; }
  .error { border-left: 4px solid var(--bad); padding: .25rem .75rem; margin: 0 0 1rem; color: var(--bad); font-weight: 600; }
  table { width: 100%; border-collapse: collapse; }
  td, th { text-align: left; padding: .35rem 0; border-bottom: 1px solid var(--rule); vertical-align: top; }
  td:last-child, th:last-child { text-align: right; font-variant-numeric: tabular-nums; }
  label { display: block; margin: .75rem 0 .2rem; font-weight: 600; }
  input { width: 100%; font: inherit; padding: .5rem; color: inherit; background: transparent; border: 1px solid var(--rule); }
  .pair { display: grid; grid-template-columns: 1fr 1fr; gap: 1rem; }
  button { font: inherit; font-weight: 600; margin-top: 1rem; padding: .6rem 1.2rem; min-height: 2.75rem; cursor: pointer; border: 1px solid var(--main); }
  .primary { background: var(--main); color: var(--sheet); }
  .plain { background: transparent; color: var(--main); }
  a { color: var(--main); }
  :focus-visible { outline: 3px solid var(--main); outline-offset: 2px; }
  code { font-variant-numeric: tabular-nums; }
`;

export function htmlPage(title: string, body: string): string {
  return `<!doctype html>
<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1">
<title>${escapeHtml(title)}</title><link rel="icon" href="data:,"><style>${STYLE}</style></head>
<body><main><p class="note">Local payment stand-in. No real money moves here.</p>${body}</main></body></html>`;
}
