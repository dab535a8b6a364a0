/** Every permission by name; the policy on the server and the buttons on the screens use the same. */
export const permissions = [
  // companies
  'company.view',
  'company.edit',
  'company.members',
  'company.payouts',
  'company.documents',
  'verification.ask',
  'directory.view',
  // machines and requests (buyer)
  'machine.view',
  'machine.edit',
  'request.view-own',
  'request.edit',
  'request.post',
  'request.withdraw',
  'question.answer',
  'bid.compare',
  'award.make',
  'award.approve',
  // requests and bids (fabricator)
  'board.view',
  'question.ask',
  'bid.edit',
  'bid.view-own',
  // orders: either party
  'order.view',
  'order.message',
  'order.dispute',
  'order.end',
  'change.propose',
  // orders: buyer
  'milestone.fund',
  'milestone.release',
  'drawing.judge',
  'record.judge',
  'receipt.confirm',
  'running-record.enter',
  // orders: fabricator
  'order.acknowledge',
  'drawing.submit',
  'record.enter',
  'order.ship',
  // coils
  'coil.view',
  'coil.ask-repair',
  // platform
  'admin.view',
  'admin.verify',
  'admin.decide-dispute',
  'admin.operate',
] as const;
export type Permission = (typeof permissions)[number];
