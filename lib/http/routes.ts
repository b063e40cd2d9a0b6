import { z } from 'zod';
import {
  allTakenUpSchema,
  changeRoleSchema,
  changeSettingsSchema,
  copyNotebookSchema,
  correlationSchema,
  createGroupSchema,
  createNotebookSchema,
  createTokenSchema,
  createdSchema,
  drawsFormats,
  drawsSchema,
  extendFitSchema,
  evaluatedSchema,
  evaluateSchema,
  fitSchema,
  groupLogSchema,
  groupNamedSchema,
  groupSchema,
  healthSchema,
  idSchema,
  invitationSchema,
  inviteSchema,
  logQuerySchema,
  manifestSchema,
  measurementCreatedSchema,
  measurementDeletedSchema,
  measurementListedSchema,
  measurementSchema,
  memberSchema,
  meSchema,
  mocksLimit,
  notebookCreatedSchema,
  notebookSchema,
  patchMeasurementSchema,
  patchNotebookSchema,
  pointsLimit,
  renameGroupSchema,
  restoreRevisionSchema,
  revisionSchema,
  sampleFormats,
  settingsSchema,
  shiftsSchema,
  startFitSchema,
  statementQuerySchema,
  statementSchema,
  takenUpSchema,
  takeUpSchema,
  templateSchema,
  tokenCreatedSchema,
  tokenSchema,
  typesetBodySchema,
  typesetStatementSchema,
  versionQuerySchema,
} from '@/lib/schemas';
import type { Action } from '@/lib/policies';
import { administrationRoutes } from './administration-routes';
import { checkRoutes } from './check-routes';
import { comparisonRoutes } from './comparison-routes';
import { scanRoutes } from './scan-routes';

/** Largest part `meta` of an upload: a name, a description and column names. */
export const metaLimit = 64 * 1024;

/** One part of a multipart body. */
export interface PartRule {
  limit: number;
  required?: boolean;
  summary: string;
}

export interface Row {
  summary: string;
  /** `anyone` needs no sign-in, `user` any signed-in person, `administrator` one who administers the site; an action is asked of the member of the record's group. */
  permission: 'anyone' | 'user' | 'administrator' | Action;
  query?: z.ZodType;
  body?: z.ZodType;
  parts?: Readonly<Record<string, PartRule>>;
  /** Schema of the JSON answer; a route that answers otherwise says what it `produces`: one type, or several after commas. */
  answer?: z.ZodType;
  produces?: string;
  status?: 200 | 201 | 202;
}

const measurementParts = {
  file: { limit: pointsLimit, required: true, summary: 'The points, as delimited text.' },
  covariance: { limit: mocksLimit, summary: 'Their covariance, one row a line.' },
  mocks: { limit: mocksLimit, summary: 'Mock measurements, one mock a line, in place of a covariance.' },
  window: {
    limit: mocksLimit,
    summary: 'A window: edges of the theory bins in two rows, then one row a bin.',
  },
  columns: { limit: pointsLimit, summary: 'Named columns that are fitted beside the template.' },
  theoryCovariance: { limit: mocksLimit, summary: 'A known covariance added to that of the data.' },
  meta: { limit: metaLimit, summary: 'JSON: name, description, columns, mockCount, simulated, blind.' },
} as const satisfies Record<string, PartRule>;

/** Every route of the API. A route file names its row; a file without one fails the tests. */
export const routes = {
  'GET /health': { summary: 'State of the instance.', permission: 'anyone', answer: healthSchema },
  'GET /openapi.json': {
    summary: 'This description.',
    permission: 'anyone',
    answer: z.record(z.string(), z.unknown()),
  },
  'GET /me': { summary: 'Who is asking, and their groups.', permission: 'user', answer: meSchema },
  'GET /me/settings': {
    summary: 'What one has chosen for oneself: mail about fits.',
    permission: 'user',
    answer: settingsSchema,
  },
  'PATCH /me/settings': {
    summary: 'Change what one has chosen.',
    permission: 'user',
    body: changeSettingsSchema,
    answer: settingsSchema,
  },
  'GET /me/tokens': {
    summary: 'One’s own personal tokens, without their secrets.',
    permission: 'user',
    answer: z.array(tokenSchema),
  },
  'POST /me/tokens': {
    summary: 'Make a personal token; its secret is in this answer and nowhere else. Only with a session.',
    permission: 'user',
    body: createTokenSchema,
    answer: tokenCreatedSchema,
    status: 201,
  },
  'DELETE /me/tokens/:id': {
    summary: 'Revoke a personal token of one’s own.',
    permission: 'user',
    answer: tokenSchema,
  },
  'POST /groups': {
    summary: 'Create a group; its creator leads it.',
    permission: 'user',
    body: createGroupSchema,
    answer: createdSchema,
    status: 201,
  },
  'GET /groups/:id': {
    summary: 'A group with its members, notebooks and measurements.',
    permission: 'group.read',
    answer: groupSchema,
  },
  'PATCH /groups/:id': {
    summary: 'Rename a group.',
    permission: 'group.rename',
    body: renameGroupSchema,
    answer: groupNamedSchema,
  },
  'GET /groups/:id/audit': {
    summary: 'Who did what when in a group, newest first, a page at a time.',
    permission: 'group.audit',
    query: logQuerySchema,
    answer: groupLogSchema,
  },
  'GET /groups/:id/invitations': {
    summary: 'Invitations that are still open.',
    permission: 'group.invite',
    answer: z.array(invitationSchema),
  },
  'POST /groups/:id/invitations': {
    summary: 'Invite a person by e-mail.',
    permission: 'group.invite',
    body: inviteSchema,
    answer: createdSchema,
    status: 201,
  },
  'DELETE /groups/:id/invitations/:invitationId': {
    summary: 'Take back an invitation that is still open.',
    permission: 'group.invite',
    answer: invitationSchema,
  },
  'POST /groups/:id/invitations/:invitationId/send': {
    summary: 'Mail an open invitation once more.',
    permission: 'group.invite',
    answer: invitationSchema,
  },
  'PATCH /groups/:id/members/:userId': {
    summary: 'Give a member another role.',
    permission: 'group.roles',
    body: changeRoleSchema,
    answer: memberSchema,
  },
  'DELETE /groups/:id/members/:userId': {
    summary: 'Leave a group; a lead may also remove another member.',
    permission: 'group.leave',
    answer: memberSchema,
  },
  'POST /groups/:id/measurements': {
    summary: 'Upload a measurement.',
    permission: 'measurement.upload',
    parts: measurementParts,
    answer: measurementCreatedSchema,
    status: 201,
  },
  'POST /measurements/:id/versions': {
    summary: 'Upload a newer version of a measurement.',
    permission: 'measurement.upload',
    parts: measurementParts,
    answer: measurementCreatedSchema,
    status: 201,
  },
  'GET /groups/:id/measurements': {
    summary: 'The measurements of a group in their newest versions, with their points, newest first.',
    permission: 'measurement.read',
    answer: z.array(measurementListedSchema),
  },
  'GET /measurements/:id': {
    summary: 'A measurement with its points, in its newest version or the one asked for.',
    permission: 'measurement.read',
    query: versionQuerySchema,
    answer: measurementSchema,
  },
  'GET /measurements/:id/correlation': {
    summary: 'The correlation matrix of a version, below the diagonal.',
    permission: 'measurement.read',
    query: versionQuerySchema,
    answer: correlationSchema,
  },
  'PATCH /measurements/:id': {
    summary: 'Rename or describe a measurement.',
    permission: 'measurement.edit',
    body: patchMeasurementSchema,
    answer: measurementSchema,
  },
  'DELETE /measurements/:id': {
    summary: 'Delete a measurement that nothing rests on.',
    permission: 'measurement.delete',
    answer: measurementDeletedSchema,
  },
  'DELETE /measurements/:id/versions/:version': {
    summary: 'Delete the newest version of a measurement, if nothing rests on it.',
    permission: 'measurement.delete',
    answer: measurementDeletedSchema,
  },
  'POST /measurements/:id/take-up': {
    summary: 'Move every notebook on another version to this one and repeat their finished fits.',
    permission: 'notebook.edit',
    body: takeUpSchema,
    answer: allTakenUpSchema,
  },
  'GET /templates': {
    summary: 'Every template with its options, parameters, default priors and formula.',
    permission: 'user',
    answer: z.array(templateSchema),
  },
  'POST /templates/:id/evaluate': {
    summary: 'The prediction of a template at points or averaged over bins.',
    permission: 'user',
    body: evaluateSchema,
    answer: evaluatedSchema,
  },
  'POST /groups/:id/notebooks': {
    summary: 'Open a notebook on a measurement, or on up to four of the group together.',
    permission: 'notebook.create',
    body: createNotebookSchema,
    answer: notebookCreatedSchema,
    status: 201,
  },
  'GET /notebooks/:id': { summary: 'A notebook.', permission: 'notebook.read', answer: notebookSchema },
  'PATCH /notebooks/:id': {
    summary: 'Edit a notebook; names the revision that it edits.',
    permission: 'notebook.edit',
    body: patchNotebookSchema,
    answer: notebookSchema,
  },
  'DELETE /notebooks/:id': {
    summary: 'Erase a notebook in which nothing was tried; one with fits is archived instead.',
    permission: 'notebook.delete',
    answer: createdSchema,
  },
  'GET /notebooks/:id/events': {
    summary: 'A notebook, who else has it open, and one of its fits, as server-sent events.',
    permission: 'notebook.read',
    query: z.object({ fit: idSchema.optional() }),
    produces: 'text/event-stream',
  },
  'GET /notebooks/:id/revisions/:revision': {
    summary: 'One revision of a notebook with all that it settled.',
    permission: 'notebook.read',
    answer: revisionSchema,
  },
  'POST /notebooks/:id/revisions/:revision/restore': {
    summary: 'Make an earlier revision stand again, as a new one; names the revision that stands.',
    permission: 'notebook.edit',
    body: restoreRevisionSchema,
    answer: notebookSchema,
  },
  'POST /notebooks/:id/copy': {
    summary: 'Open a notebook with the settings of this one, or of one of its fits.',
    permission: 'notebook.create',
    body: copyNotebookSchema,
    answer: notebookCreatedSchema,
    status: 201,
  },
  'POST /notebooks/:id/archive': {
    summary: 'Put a notebook away; it stays readable.',
    permission: 'notebook.archive',
    answer: notebookSchema,
  },
  'POST /notebooks/:id/unarchive': {
    summary: 'Take an archived notebook back into use.',
    permission: 'notebook.archive',
    answer: notebookSchema,
  },
  'POST /notebooks/:id/take-up': {
    summary: 'Move a notebook to another version of its measurement and repeat its finished fits.',
    permission: 'notebook.edit',
    body: takeUpSchema,
    answer: takenUpSchema,
  },
  'GET /notebooks/:id/shifts': {
    summary: 'How every quantity moved from each fit to the one that repeats it on another version.',
    permission: 'notebook.read',
    answer: shiftsSchema,
  },
  'GET /notebooks/:id/statement': {
    summary: 'The group’s words with the numbers that they refer to, as they stand or stood at a revision.',
    permission: 'notebook.read',
    query: statementQuerySchema,
    answer: statementSchema,
  },
  'POST /notebooks/:id/statement/typeset': {
    summary:
      'Words with the numbers that they refer to; nothing is stored. Storing is a PATCH of the notebook.',
    permission: 'notebook.edit',
    body: typesetBodySchema,
    answer: typesetStatementSchema,
  },
  'POST /notebooks/:id/fits': {
    summary: 'Freeze a snapshot and start to sample.',
    permission: 'fit.start',
    body: startFitSchema,
    answer: createdSchema,
    status: 202,
  },
  ...comparisonRoutes,
  ...scanRoutes,
  'GET /fits/:id': { summary: 'A fit with its diagnostics.', permission: 'fit.read', answer: fitSchema },
  'GET /fits/:id/events': {
    summary: 'The changing parts of a fit as server-sent events.',
    permission: 'fit.read',
    produces: 'text/event-stream',
  },
  'POST /fits/:id/stop': {
    summary: 'Stop a fit; what it has drawn stays.',
    permission: 'fit.stop',
    answer: fitSchema,
  },
  'POST /fits/:id/resume': {
    summary: 'Go on with a stopped or failed fit, up to its budget.',
    permission: 'fit.resume',
    answer: fitSchema,
  },
  'POST /fits/:id/extend': {
    summary: 'Allow more draws, and go on.',
    permission: 'fit.extend',
    body: extendFitSchema,
    answer: fitSchema,
  },
  'GET /fits/:id/draws': {
    summary:
      'Thinned draws for figures. With format=float32 they come packed, little-endian: the length of a JSON head (uint32), the head, the draws (uint32), log-likelihoods and columns (float32).',
    permission: 'fit.read',
    query: z.object({
      max: z.coerce.number<string>().int().min(100).max(200_000).default(20_000),
      format: z.enum(drawsFormats).default('json'),
    }),
    answer: drawsSchema,
  },
  'GET /fits/:id/samples': {
    summary: 'Every stored draw, unrounded.',
    permission: 'fit.read',
    query: z.object({ format: z.enum(sampleFormats).default('csv') }),
    produces: 'text/csv, text/x-ecsv, application/vnd.apache.parquet, application/zip',
  },
  'GET /fits/:id/manifest': {
    summary: 'Checksums, snapshot, seeds and versions of a fit.',
    permission: 'fit.read',
    answer: manifestSchema,
  },
  ...checkRoutes,
  ...administrationRoutes,
} as const satisfies Record<`${'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE'} /${string}`, Row>;

export type RouteKey = keyof typeof routes;
export const rowOf = (key: RouteKey): Row => routes[key];
