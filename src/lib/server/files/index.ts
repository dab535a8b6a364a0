export { startUpload } from './start-upload.ts';
export { signUploadParts } from './upload-parts.ts';
export { finishUpload, uploadState } from './finish-upload.ts';
export { cancelUpload, clearUnfinishedUploads } from './cancel-upload.ts';
export { fileLink } from './file-link.ts';
export {
  closeFileToVerified,
  openFileToVerified,
  requireCleanFile,
  shareFile,
  unsafeFileFacts,
  type FileFacts,
} from './use-files.ts';
export {
  addCompanyDocument,
  archiveCompanyDocument,
  listCompanyDocuments,
  unsafeCurrentDocuments,
  type CompanyDocument,
} from './documents.ts';
export { objectStore, useObjectStore } from './store.ts';
