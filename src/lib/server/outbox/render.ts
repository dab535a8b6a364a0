import type { z } from 'zod';
import type { mailContent } from './content.ts';

type Content = z.output<typeof mailContent>;

function escape(text: string): string {
  return text
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;');
}

const footer =
  'Coilyard — tuned before the copper is bent. You get this mail because of your part in what it tells about; what you get can be chosen in your account, except security and money.';

export function renderText(content: Content, origin: string): string {
  const lines = [content.heading, '', ...content.paragraphs.flatMap((p) => [p, ''])];
  for (const [name, value] of content.facts) lines.push(`${name}: ${value}`);
  if (content.facts.length > 0) lines.push('');
  if (content.action) lines.push(`${content.action.label}:`, `${origin}${content.action.path}`, '');
  return [...lines, '--', footer, ''].join('\n');
}

/** One look for every mail: paper, graphite, a copper rule; tables only, as mail programs need. */
export function renderHtml(content: Content, origin: string): string {
  const paragraphs = content.paragraphs
    .map((p) => `<p style="margin:0 0 14px;line-height:1.5">${escape(p)}</p>`)
    .join('');
  const facts =
    content.facts.length === 0
      ? ''
      : `<table role="presentation" style="border-collapse:collapse;margin:0 0 18px;width:100%">${content.facts
          .map(
            ([name, value]) =>
              `<tr><td style="border-top:1px solid #d8cfbd;padding:6px 12px 6px 0;color:#5b564e;vertical-align:top">${escape(name)}</td><td style="border-top:1px solid #d8cfbd;padding:6px 0;vertical-align:top">${escape(value)}</td></tr>`,
          )
          .join('')}</table>`;
  const action = content.action
    ? `<p style="margin:0 0 18px"><a href="${escape(origin + content.action.path)}" style="display:inline-block;background:#8f4a20;color:#fffaf0;padding:10px 18px;text-decoration:none;font-weight:600">${escape(content.action.label)}</a></p><p style="margin:0 0 14px;font-size:13px;color:#5b564e;word-break:break-all">${escape(origin + content.action.path)}</p>`
    : '';
  return `<!doctype html><html lang="en"><head><meta charset="utf-8"><title>${escape(content.heading)}</title></head><body style="margin:0;background:#efe8da;color:#2b2a28;font-family:Manrope,Segoe UI,Helvetica,Arial,sans-serif;font-size:15px"><table role="presentation" width="100%"><tr><td align="center" style="padding:24px 12px"><table role="presentation" style="max-width:600px;width:100%;background:#fbf8f1;border:1px solid #d8cfbd;border-top:4px solid #a4582c"><tr><td style="padding:24px 28px"><p style="margin:0 0 16px;font-weight:700;letter-spacing:.02em">Coilyard</p><h1 style="margin:0 0 16px;font-size:20px;line-height:1.3">${escape(content.heading)}</h1>${paragraphs}${facts}${action}<p style="margin:18px 0 0;border-top:1px solid #d8cfbd;padding-top:12px;font-size:12px;color:#5b564e">${escape(footer)}</p></td></tr></table></td></tr></table></body></html>`;
}
