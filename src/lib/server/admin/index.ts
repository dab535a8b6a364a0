export { adminOverview } from './overview.ts';
export { handleMail, listMails, mailFor } from './mails.ts';
export { handleJob, listJobs } from './jobs.ts';
export { listUsers } from './users.ts';
export { checkAuditTrail, listAuditTrail, trailFilterChoices } from './trail.ts';
export { probeServices, serviceProbes, type Probe } from './probes.ts';
