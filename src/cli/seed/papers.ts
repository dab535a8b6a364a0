import PDFDocument from 'pdfkit';
import type { Requirement } from '../../lib/induction/check/types.ts';

const mm = (metres: number) => `${(metres * 1000).toFixed(1)} mm`;

function bytes(document: PDFKit.PDFDocument): Promise<Buffer> {
  return new Promise((resolve, reject) => {
    const chunks: Buffer[] = [];
    document.on('data', (chunk: Buffer) => chunks.push(chunk));
    document.on('end', () => resolve(Buffer.concat(chunks)));
    document.on('error', reject);
  });
}

/** A drawing sheet as a shop would send it: a side view of a helix with its main dimensions, to be judged. */
export async function coilDrawingPdf(
  requirement: Requirement,
  title: string,
  revision: string,
): Promise<Buffer> {
  const document = new PDFDocument({ size: 'A4', layout: 'landscape', margin: 36 });
  const done = bytes(document);
  const { winding, tube, leads } = requirement.coil;
  document.rect(24, 24, 794, 547).lineWidth(1.5).stroke();
  if (winding.shape === 'helix' && tube.kind === 'round') {
    const inside =
      winding.insideDiameter ?? requirement.part.outsideDiameter + 2 * (winding.clearance ?? 0.004);
    const turns = winding.turns ?? 5;
    const scale = 260 / Math.max(inside + 2 * tube.outsideDiameter, winding.pitch * (turns + 1));
    const [x, y] = [330, 300];
    const mean = ((inside + tube.outsideDiameter) * scale) / 2;
    for (let n = 0; n < turns; n += 1) {
      const z = (n - (turns - 1) / 2) * winding.pitch * scale;
      for (const side of [-1, 1]) {
        document
          .circle(x + side * mean, y + z, (tube.outsideDiameter * scale) / 2)
          .lineWidth(1)
          .stroke();
        document.circle(x + side * mean, y + z, (tube.outsideDiameter / 2 - tube.wall) * scale).stroke();
      }
      document
        .moveTo(x - mean, y + z)
        .lineTo(x + mean, y + z)
        .dash(2, { space: 3 })
        .stroke()
        .undash();
    }
    document
      .fontSize(10)
      .text(
        [
          `Inside diameter  ${mm(inside)}`,
          `Turns  ${turns}, pitch ${mm(winding.pitch)}`,
          `Tube  ${mm(tube.outsideDiameter)} × ${mm(tube.wall)}`,
          leads ? `Leads  ${mm(leads.length)} long, ${mm(leads.spacing)} apart` : '',
        ]
          .filter(Boolean)
          .join('\n'),
        560,
        120,
      );
  }
  document.rect(520, 491, 298, 80).stroke();
  document.fontSize(13).text(title, 530, 500, { width: 280 });
  document.fontSize(10).text(`Revision ${revision}    Scale as shown    Demo drawing`, 530, 545);
  document.end();
  return done;
}

/** A one-page paper with a heading and lines: certificates, delivery notes. */
export async function plainPdf(heading: string, lines: readonly string[]): Promise<Buffer> {
  const document = new PDFDocument({ size: 'A4', margin: 60 });
  const done = bytes(document);
  document.fontSize(16).text(heading).moveDown();
  document.fontSize(11).text(lines.join('\n'));
  document.end();
  return done;
}
