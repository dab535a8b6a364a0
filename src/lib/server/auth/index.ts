export {
  askAddressChange,
  changePassword,
  confirmPassword,
  confirmTwoFactor,
  endOtherSessions,
  endSession,
  listSessions,
  pendingTwoFactor,
  startTwoFactor,
  stopTwoFactor,
  updateProfile,
} from './account.ts';
export { actorOfUser, loadActor } from './actor.ts';
export { createAuth, sessionCookie, sessionLimits, type Auth } from './create.ts';
export {
  answerSecondFactor,
  askPasswordReset,
  createVerifiedPerson,
  resetPassword,
  sendVerificationAgain,
  signIn,
  signOut,
  signUp,
  verifyAddress,
  type SignInContext,
} from './flows.ts';
export { AdminError, enrolSecondFactor, setAdmin } from './admins.ts';
export { auth, provideAuth, signInContext } from './instance.ts';
export { passwordLength } from './password.ts';
export { requireFreshSession, resolveVisitor, type SessionState } from './session.ts';
