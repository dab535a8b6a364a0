export { askForVerification, saveFabricatorProfile, withdrawAsking } from './ask-verification.ts';
export { refuseFabricator, revokeVerification, verifyFabricator } from './decide-verification.ts';
export { companyVerification, verificationCaseFor, verificationQueue } from './read.ts';
export { fabricatorPage, listFabricators } from './directory.ts';
