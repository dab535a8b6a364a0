import type { Permission } from './permissions.ts';
import { defineStateMachine } from './transitions.ts';

/** What a file may be. Extension and content are both checked; SVG and HTML are never taken. */
export const fileKinds = ['pdf', 'png', 'jpeg', 'webp', 'dxf', 'step', 'stl', 'csv'] as const;
export type FileKind = (typeof fileKinds)[number];

interface KindFacts {
  label: string;
  extensions: readonly string[];
  /** The type that is stored, signed and sent, whatever the browser called it. */
  contentType: string;
}

export const fileKindFacts: Record<FileKind, KindFacts> = {
  pdf: { label: 'PDF', extensions: ['pdf'], contentType: 'application/pdf' },
  png: { label: 'PNG', extensions: ['png'], contentType: 'image/png' },
  jpeg: { label: 'JPEG', extensions: ['jpg', 'jpeg'], contentType: 'image/jpeg' },
  webp: { label: 'WebP', extensions: ['webp'], contentType: 'image/webp' },
  dxf: { label: 'DXF', extensions: ['dxf'], contentType: 'image/vnd.dxf' },
  step: { label: 'STEP', extensions: ['step', 'stp'], contentType: 'model/step' },
  stl: { label: 'STL', extensions: ['stl'], contentType: 'model/stl' },
  csv: { label: 'CSV', extensions: ['csv'], contentType: 'text/csv' },
};

export const filePurposes = [
  'company-document',
  'request-sketch',
  'part-drawing',
  'bid-attachment',
  'coil-drawing',
  'as-built-photo',
  'certificate',
  'dispute-evidence',
  'shipping-paper',
  'message-attachment',
] as const;
export type FilePurpose = (typeof filePurposes)[number];

interface PurposeFacts {
  label: string;
  kinds: readonly FileKind[];
  /** What a member needs to upload for this purpose. */
  upload: Permission;
  /** What an admin needs to read it; null where admins have no business with it. */
  adminRead: Permission | null;
}

const papers = ['pdf', 'png', 'jpeg', 'webp'] as const;
const drawings = ['pdf', 'png', 'jpeg', 'webp', 'dxf', 'step', 'stl'] as const;

export const filePurposeFacts: Record<FilePurpose, PurposeFacts> = {
  'company-document': {
    label: 'Company document',
    kinds: papers,
    upload: 'company.documents',
    adminRead: 'admin.verify',
  },
  'request-sketch': { label: 'Sketch', kinds: drawings, upload: 'request.edit', adminRead: null },
  'part-drawing': { label: 'Part drawing', kinds: drawings, upload: 'request.edit', adminRead: null },
  'bid-attachment': {
    label: 'Bid attachment',
    kinds: [...drawings, 'csv'],
    upload: 'bid.edit',
    adminRead: null,
  },
  'coil-drawing': {
    label: 'Coil drawing',
    kinds: drawings,
    upload: 'drawing.submit',
    adminRead: 'admin.decide-dispute',
  },
  'as-built-photo': {
    label: 'As-built photo',
    kinds: papers,
    upload: 'record.enter',
    adminRead: 'admin.decide-dispute',
  },
  certificate: {
    label: 'Certificate',
    kinds: [...papers, 'csv'],
    upload: 'record.enter',
    adminRead: 'admin.decide-dispute',
  },
  'dispute-evidence': {
    label: 'Evidence',
    kinds: fileKinds,
    upload: 'order.dispute',
    adminRead: 'admin.decide-dispute',
  },
  'shipping-paper': {
    label: 'Shipping paper',
    kinds: papers,
    upload: 'order.ship',
    adminRead: 'admin.decide-dispute',
  },
  'message-attachment': {
    label: 'Attachment',
    kinds: fileKinds,
    upload: 'order.message',
    adminRead: 'admin.decide-dispute',
  },
};

/** The life of a file: nobody sees it before it is clean; what is refused is deleted from the store. */
export const fileMachine = defineStateMachine({
  name: 'file',
  initial: 'pending',
  states: ['pending', 'clean', 'refused'],
  transitions: [
    { event: 'pass', from: ['pending'], to: 'clean' },
    { event: 'refuse', from: ['pending'], to: 'refused' },
    { event: 'cancel', from: ['pending'], to: 'refused' },
    { event: 'expire', from: ['pending'], to: 'refused' },
  ],
});
export type FileState = (typeof fileMachine.states)[number];

/** One signed slot takes this much; above it the file goes in parts. */
export const singleUploadMaxBytes = 16 * 1024 * 1024;
export const uploadPartBytes = 8 * 1024 * 1024;
export const uploadMaxBytes = 512 * 1024 * 1024;
export const fileNameMaxChars = 150;

/** The kind that a name's extension says; undefined when it is none that is taken. */
export function kindOfName(name: string): FileKind | undefined {
  const extension = /\.([a-z0-9]+)$/i.exec(name)?.[1]?.toLowerCase();
  if (extension === undefined) return undefined;
  return fileKinds.find((kind) => fileKindFacts[kind].extensions.includes(extension));
}

/** `.pdf,.png …` for a file field. */
export function acceptOf(purpose: FilePurpose): string {
  return filePurposeFacts[purpose].kinds
    .flatMap((kind) => fileKindFacts[kind].extensions.map((extension) => `.${extension}`))
    .join(',');
}

/** `PDF, PNG or JPEG` */
export function kindsText(purpose: FilePurpose): string {
  const labels = filePurposeFacts[purpose].kinds.map((kind) => fileKindFacts[kind].label);
  const last = labels.at(-1) ?? '';
  return labels.length < 2 ? last : `${labels.slice(0, -1).join(', ')} or ${last}`;
}

/**
 * A name as it is kept and shown: without folders, control characters and marks that turn the reading
 * direction (they can disguise an extension). Names are data, never paths.
 */
export function cleanFileName(name: string): string {
  const base = name.split(/[\\/]/).at(-1) ?? '';
  return base
    .normalize('NFC')
    .replace(/[\p{Cc}\p{Cf}\p{Co}\p{Cs}\p{Zl}\p{Zp}]/gu, '')
    .replace(/\s+/g, ' ')
    .trim();
}

/** Papers that a company keeps, and names when it asks to be verified. */
export const companyDocumentKindText = {
  registration: 'Company registration',
  insurance: 'Insurance',
  certificate: 'Certificate (quality system, calibration)',
  equipment: 'List of equipment',
  other: 'Other paper',
} as const;
