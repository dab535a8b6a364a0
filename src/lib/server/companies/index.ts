export {
  addAddress,
  archiveAddress,
  updateAddress,
  type AddressPurpose,
  type PostalAddress,
} from './addresses.ts';
export { createCompany, type CreateCompanyInput } from './create-company.ts';
export {
  acceptInvitation,
  invitationByToken,
  invitationsTo,
  invite,
  withdrawInvitation,
  type InvitationView,
} from './invitations.ts';
export { companyDeskItems } from './desk.ts';
export { changeRoles, removeMember } from './members.ts';
export { companyPage, type CompanyPage } from './queries.ts';
export { notifyCompany, recipientsOf } from './recipients.ts';
export { setApprovalLimit, updateCompany, type UpdateCompanyInput } from './update-company.ts';
