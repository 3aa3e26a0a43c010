import type { Rule } from '#server/http/authorisation/decide.ts'

const on = (where: Rule['on'], permission: Rule['permission']): Rule => ({ permission, on: where })
const visit = on('site', 'visit')

/** The rule of every endpoint, by its name. The application refuses to start while one is missing or left over. */
export const endpointRules: Readonly<Record<string, Rule>> = {
  getSession: visit,
  signIn: visit,
  signOut: visit,
  changePassword: on('site', 'use-account'),
  requestPasswordReset: visit,
  getPasswordReset: visit,
  resetPassword: visit,
  getInvitation: visit,
  acceptInvitation: visit,

  getHome: visit,
  searchDraws: visit,
  getDraw: visit,
  getPick: visit,
  listOrganisations: visit,
  getOrganisation: visit,
  getLog: visit,

  listOfficeDraws: on('organisation', 'list-draws'),
  createDraw: on('organisation', 'edit'),
  getOfficeDraw: on('draw', 'read-draw'),
  updateDraw: on('draw', 'edit'),
  putPrizes: on('draw', 'edit'),
  openDraw: on('draw', 'run'),
  closeDraw: on('draw', 'run'),
  reopenDraw: on('draw', 'run'),
  // Preparing the seal is an organiser's work; sealing is the promoter's.
  getSealSummary: on('draw', 'read-entrants'),
  sealDraw: on('draw', 'run'),
  postponeDraw: on('draw', 'run'),
  cancelDraw: on('draw', 'run'),
  listEntrants: on('draw', 'read-entrants'),
  addEntrant: on('draw', 'edit'),
  updateEntrant: on('draw', 'edit'),
  removeEntrant: on('draw', 'edit'),
  uploadImport: on('draw', 'edit'),
  getImport: on('draw', 'read-entrants'),
  applyImport: on('draw', 'edit'),
  discardImport: on('draw', 'edit'),
  listImports: on('draw', 'read-entrants'),
  nameWitness: on('draw', 'run'),
  removeWitness: on('draw', 'run'),
  stateAsWitness: on('draw', 'witness'),
  // Its lines tell of single entrants.
  getDrawAudit: on('draw', 'read-entrants'),
  listPeople: on('organisation', 'read-people'),
  invitePerson: on('organisation', 'manage-people'),
  revokeInvitation: on('organisation', 'manage-people'),
  removePerson: on('organisation', 'manage-people'),

  listAllOrganisations: on('site', 'administer'),
  createOrganisation: on('site', 'administer'),
  getOrganisationForAdministrator: on('organisation', 'administer'),
  updateOrganisation: on('organisation', 'administer'),
  changeOrganisationState: on('organisation', 'administer'),
  inviteForAdministrator: on('organisation', 'administer'),
  sendPasswordReset: on('site', 'administer'),
  getSiteState: on('site', 'administer'),
  retryJob: on('site', 'administer'),
  getAudit: on('site', 'administer'),
}
