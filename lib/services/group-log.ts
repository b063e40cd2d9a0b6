import { Op, type WhereOptions } from 'sequelize';
import { AuditEvent, Fit, Measurement, Notebook } from '@/models';
import { AppError } from '@/lib/errors';
import { idSchema, type GroupLog, type LogEvent, type LogKind, type LogQuery } from '@/lib/schemas';
import type { Access } from './access';
import { emailsOf } from './people';

const typesOf: Record<LogKind, readonly string[]> = {
  people: ['group', 'invitation', 'membership'],
  measurement: ['measurement'],
  notebook: ['notebook'],
  fit: ['fit'],
};

/** What of an event's details is shown. Anything else stays in the table: whoever adds a detail decides here. */
const shownDetails = [
  'email',
  'role',
  'from',
  'name',
  'title',
  'again',
  'number',
  'version',
  'revision',
  'sections',
  'fields',
  'draws',
  'maxDraws',
  'restoredFrom',
  'muMin',
  'muMax',
] as const;

function detailsOf(event: AuditEvent): LogEvent['details'] {
  const given = event.details ?? {};
  const shown: LogEvent['details'] = {};
  for (const key of shownDetails) {
    const value = given[key];
    if (typeof value === 'string' || typeof value === 'number' || typeof value === 'boolean')
      shown[key] = value;
    else if (Array.isArray(value)) shown[key] = value.filter((one) => typeof one === 'string');
  }
  return shown;
}

interface Cursor {
  at: Date;
  id: string;
}

const written = ({ createdAt, id }: AuditEvent): string => `${createdAt.toISOString()}_${id}`;

function readCursor(text: string): Cursor {
  const [at, id] = text.split('_');
  const time = Date.parse(at);
  if (Number.isNaN(time) || !idSchema.safeParse(id).success) {
    const message = 'This names no page of the log. Take `next` of the page before, as it is.';
    throw new AppError('invalid', message, [{ path: 'before', message }]);
  }
  return { at: new Date(time), id };
}

const after = ({ at, id }: Cursor): WhereOptions => ({
  [Op.or]: [{ createdAt: { [Op.lt]: at } }, { createdAt: at, id: { [Op.lt]: id } }],
});

interface Named {
  name: string;
  notebook: string | null;
}

/** What the subjects of events are called now, by id. */
async function subjectsOf(groupId: string, events: readonly AuditEvent[]): Promise<Map<string, Named>> {
  const idsOf = (type: string) =>
    events.flatMap(({ subjectType, subjectId }) => (subjectType === type && subjectId ? [subjectId] : []));
  const fits = await Fit.findAll({
    where: { id: idsOf('fit'), groupId },
    attributes: ['id', 'number', 'notebookId'],
  });
  const [notebooks, measurements] = await Promise.all([
    Notebook.findAll({
      where: { id: [...idsOf('notebook'), ...fits.map(({ notebookId }) => notebookId)], groupId },
      attributes: ['id', 'title'],
    }),
    Measurement.findAll({ where: { id: idsOf('measurement'), groupId }, attributes: ['id', 'name'] }),
  ]);
  const titles = new Map(notebooks.map(({ id, title }) => [id, title]));
  return new Map<string, Named>([
    ...notebooks.map(({ id, title }) => [id, { name: title, notebook: id }] as const),
    ...measurements.map(({ id, name }) => [id, { name, notebook: null }] as const),
    ...fits.map(
      ({ id, number, notebookId }) =>
        [
          id,
          { name: `fit ${number} of “${titles.get(notebookId) ?? 'a notebook'}”`, notebook: notebookId },
        ] as const,
    ),
  ]);
}

async function peopleOf(groupId: string): Promise<GroupLog['people']> {
  const rows = await AuditEvent.findAll({
    where: { groupId, actorId: { [Op.ne]: null } },
    attributes: ['actorId'],
    group: ['actorId'],
  });
  const emails = await emailsOf(rows.flatMap(({ actorId }) => actorId ?? []));
  return [...emails]
    .map(([userId, email]) => ({ userId, email }))
    .sort((a, b) => a.email.localeCompare(b.email, 'en'));
}

/** Who did what when in a group, newest first, a page at a time. */
export async function readGroupLog(access: Access, query: LogQuery): Promise<GroupLog> {
  access.require('group.audit');
  const { groupId } = access;
  const { before, person, kind, limit } = query;
  const conditions: WhereOptions[] = [
    { groupId },
    ...(person ? [{ actorId: person }] : []),
    ...(kind ? [{ subjectType: [...typesOf[kind]] }] : []),
    ...(before ? [after(readCursor(before))] : []),
  ];
  const found = await AuditEvent.findAll({
    where: { [Op.and]: conditions },
    order: [
      ['createdAt', 'DESC'],
      ['id', 'DESC'],
    ],
    limit: limit + 1,
  });
  const shown = found.slice(0, limit);
  const [people, subjects] = await Promise.all([peopleOf(groupId), subjectsOf(groupId, shown)]);
  const emails = new Map(people.map(({ userId, email }) => [userId, email]));
  return {
    events: shown.map((event) => {
      const { id, createdAt, actorId, action, subjectType, subjectId } = event;
      const subject = subjectId === null ? undefined : subjects.get(subjectId);
      return {
        id,
        at: createdAt.toISOString(),
        actor: actorId === null ? null : { userId: actorId, email: emails.get(actorId) ?? '' },
        action,
        subject: {
          type: subjectType,
          id: subjectId,
          name: subject?.name ?? null,
          notebook: subject?.notebook ?? null,
        },
        details: detailsOf(event),
      };
    }),
    next: found.length > limit ? written(shown[shown.length - 1]) : null,
    people,
  };
}
