import {
  changeUserSchema,
  fitLimitsSchema,
  instanceStateSchema,
  setFitLimitSchema,
  siteUserSchema,
  siteUsersSchema,
  storageStateSchema,
  usersQuerySchema,
} from '@/lib/schemas';

/** The site administrator's rows of the table of routes. */
export const administrationRoutes = {
  'GET /administration': {
    summary: 'Services with their latency, the queue by group and notebook, workers.',
    permission: 'administrator',
    answer: instanceStateSchema,
  },
  'GET /administration/storage': {
    summary: 'What tables and objects take up.',
    permission: 'administrator',
    answer: storageStateSchema,
  },
  'GET /administration/limits': {
    summary: 'How many fits each group may run at once, with what runs and waits.',
    permission: 'administrator',
    answer: fitLimitsSchema,
  },
  'PATCH /administration/limits': {
    summary: 'Set how many fits a group, or every group without a limit of its own, may run at once.',
    permission: 'administrator',
    body: setFitLimitSchema,
    answer: fitLimitsSchema,
  },
  'GET /administration/users': {
    summary: 'Everybody who has an account, by address, a page at a time.',
    permission: 'administrator',
    query: usersQuerySchema,
    answer: siteUsersSchema,
  },
  'PATCH /administration/users/:userId': {
    summary: 'Let somebody sign in or not.',
    permission: 'administrator',
    body: changeUserSchema,
    answer: siteUserSchema,
  },
  'DELETE /administration/users/:userId/sessions': {
    summary: 'End every session of somebody.',
    permission: 'administrator',
    answer: siteUserSchema,
  },
} as const;
