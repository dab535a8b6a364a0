export { requirementKey, sha256Hex } from './requirement-key.ts';
export { mostResultBytes, resultOf, runCheck, type CheckRun } from './run-check.ts';
export { closeSolvePool } from './solve-pool.ts';
export { checkBody, checkById, latestCheck, storeCheck, type CheckRow } from './store-check.ts';
export { answersOf, unsafeAnswerFinding, type FindingName } from './answer-finding.ts';
export { limitChecks } from './limit-checks.ts';
export { runSweep } from './run-sweep.ts';
export { heatingJob } from './heating-job.ts';
export { askHeating, cancelHeating, clearOldHeatings, heatingState } from './heatings.ts';
