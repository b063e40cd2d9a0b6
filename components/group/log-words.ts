import { listed } from '@/components/words/counts';
import type { LogEvent } from '@/lib/schemas';

const text = (value: LogEvent['details'][string] | undefined): string =>
  value === undefined ? '' : Array.isArray(value) ? listed(value) : String(value);

type Say = (subject: string, told: (key: string) => string, event: LogEvent) => string;

const draws: Say = (subject, told) => (told('draws') ? `${subject} at draw ${told('draws')}` : subject);

/** What was done, after the name of who did it; the subject is put in where it stands. */
const sentences: Readonly<Record<string, Say>> = {
  'group.demo': () => 'filled the group with the demo’s measurements and notebooks',
  'group.create': () => 'created the group',
  'group.rename': (_, told) => `renamed the group from “${told('from')}” to “${told('name')}”`,
  'group.invite': (_, told, { details }) =>
    details.again === true
      ? `mailed the invitation of ${told('email')} again`
      : `invited ${told('email')} as ${told('role')}`,
  'group.uninvite': (_, told) => `took back the invitation of ${told('email')} as ${told('role')}`,
  'group.join': (_, told) => `joined as ${told('role')}`,
  'group.roles': (_, told) => `changed the role of ${told('email')} from ${told('from')} to ${told('role')}`,
  'group.remove': (_, told) => `removed ${told('email')}, ${told('role')}`,
  'group.leave': (_, told) => `left the group, as ${told('role')}`,
  'measurement.upload': (subject, told) => `uploaded version ${told('version')} of ${subject}`,
  'measurement.edit': (subject, told) => `changed the ${told('changed')} of ${subject}`,
  'measurement.delete': (_, told) => `deleted the measurement “${told('name')}”`,
  'measurement.delete-version': (subject, told) => `deleted version ${told('version')} of ${subject}`,
  'notebook.take-up': (subject, told) =>
    `moved ${subject} from version ${told('from')} to ${told('to')} of its measurement, as revision ${told('revision')}`,
  'notebook.create': (subject) => `opened ${subject}`,
  'notebook.edit': (subject, told) =>
    `saved revision ${told('revision')} of ${subject}${told('restoredFrom') ? `, taken from revision ${told('restoredFrom')}` : ''}${told('sections') ? `: ${told('sections')}` : ''}`,
  'notebook.archive': (subject) => `archived ${subject}`,
  'notebook.unarchive': (subject) => `took ${subject} out of the archive`,
  'notebook.delete': (_, told) => `deleted the notebook “${told('title')}”`,
  'notebook.compare': (subject, told) => `compared numbers of fields in ${subject}: ${told('fields')}`,
  'scan.start': (subject, told) => `scanned ${subject} from μ = ${told('muMin')} to ${told('muMax')}`,
  'check.start': (subject, told) =>
    `checked the calibration of ${subject} on ${told('datasets')} simulated data sets`,
  'check.stop': (subject, told) => `stopped check ${told('number')} of ${subject}`,
  'fit.start': (subject) => `started ${subject}`,
  'fit.stop': (subject, told, event) => `stopped ${draws(subject, told, event)}`,
  'fit.resume': (subject, told, event) => `resumed ${draws(subject, told, event)}`,
  'fit.extend': (subject, told) =>
    `extended ${subject}${told('draws') ? ` by ${told('draws')} draws a replica` : ''}`,
};

const things: Readonly<Record<string, string>> = {
  group: 'the group',
  invitation: 'an invitation',
  membership: 'a membership',
};

/** The sentence of an event in three parts, so that its subject can be a link: what stands before it, it, and what follows. */
export function eventSentence(event: LogEvent): { before: string; subject: string; after: string } {
  const { action, subject, details } = event;
  const quoted = subject.type !== 'fit' && subject.name !== null;
  const name = subject.name ?? things[subject.type] ?? `a ${subject.type} that is gone`;
  const mark = '\u0000';
  const say = sentences[action];
  const [, verb = action] = action.split('.');
  const told = say ? say(mark, (key) => text(details[key]), event) : `${verb}: ${mark}`;
  const at = told.indexOf(mark);
  if (at < 0) return { before: told, subject: '', after: '' };
  const open = quoted ? '“' : '';
  const close = quoted ? '”' : '';
  return { before: told.slice(0, at) + open, subject: name, after: close + told.slice(at + 1) };
}

/** The page of what an event is about, if it has one. */
export function eventPlace({ subject }: LogEvent): string | null {
  if (subject.name === null) return null;
  if (subject.type === 'measurement') return `/measurements/${subject.id}`;
  return subject.notebook === null ? null : `/notebooks/${subject.notebook}`;
}
