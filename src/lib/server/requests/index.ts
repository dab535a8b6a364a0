export { createDraft, type CreateDraftInput, type DraftSource } from './create-draft.ts';
export { saveDraft, type SaveDraftInput, type SavedDraft } from './save-draft.ts';
export { answerFinding, checkDraft, type DraftCheck } from './check-draft.ts';
export { attachFile, detachFile } from './draft-files.ts';
export {
  requestForUpdate,
  setRequestState,
  specificationOf,
  unsafeRequestFiles,
  type RequestFileView,
  type RequestRow,
  type SpecificationRow,
} from './queries.ts';
export {
  readSpecification,
  specificationText,
  type SpecificationBody,
  type SpecificationFile,
} from './specification-body.ts';
export { questionById, unsafeQuestions, type QuestionRow } from './questions.ts';
export { listRequests, type RequestListItem } from './list-requests.ts';
export { viewDraft, type DraftView } from './view-draft.ts';
export { materialKey, removeFromSearch, searchWords, tubeSize, writeToSearch } from './search-index.ts';
