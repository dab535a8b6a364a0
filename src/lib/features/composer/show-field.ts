/** Brings a field into view and puts the cursor into it, opening what hides it. */
export function showField(href: string): void {
  const target = document.querySelector<HTMLElement>(href);
  if (!target) return;
  for (let fold = target.closest('details'); fold; fold = fold.parentElement?.closest('details') ?? null) {
    fold.open = true;
  }
  target.scrollIntoView({ block: 'center' });
  target.focus({ preventScroll: true });
}

/** For links to fields inside a page, in the capture phase: opens what hides the field before anyone focuses it. */
export function followFieldLink(event: MouseEvent): void {
  const link = event.target instanceof Element ? event.target.closest('a[href^="#field-"]') : null;
  const href = link?.getAttribute('href');
  if (!href || event.ctrlKey || event.metaKey) return;
  event.preventDefault();
  showField(href);
}
