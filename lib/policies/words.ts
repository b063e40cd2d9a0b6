import { roles, type Role } from '@/lib/schemas';
import { actions, may, type Action } from './index';

/**
 * What each action is called where people read what a role may do, after "may"; actions that are one thing to them share
 * their words. An action without an entry doesn't compile.
 */
const actionWords: Record<Action, string> = {
  'group.read': 'see the members, and what is released',
  'group.leave': 'leave the group',
  'group.rename': 'rename the group',
  'group.invite': 'invite people',
  'group.roles': 'change roles',
  'group.remove': 'remove members',
  'group.audit': 'read the log',
  'measurement.read': 'read measurements',
  'measurement.upload': 'upload and rename measurements',
  'measurement.edit': 'upload and rename measurements',
  'measurement.delete': 'delete a measurement that nothing rests on',
  'measurement.blind': 'set a measurement blind',
  'notebook.read': 'read notebooks and fits',
  'notebook.create': 'open and edit notebooks',
  'notebook.edit': 'open and edit notebooks',
  'notebook.archive': 'archive and delete notebooks',
  'notebook.delete': 'archive and delete notebooks',
  'fit.read': 'read notebooks and fits',
  'fit.start': 'start, stop and extend fits',
  'fit.stop': 'start, stop and extend fits',
  'fit.resume': 'start, stop and extend fits',
  'fit.extend': 'start, stop and extend fits',
  'scan.read': 'read notebooks and fits',
  'scan.start': 'scan for frequencies',
  'check.read': 'read notebooks and fits',
  'check.start': 'start and stop checks',
  'check.stop': 'start and stop checks',
};

/** One thing that members may do, and which roles may do all of it. */
export interface Permission {
  words: string;
  roles: Role[];
}

/** Who may do what within a group, in words, as the rules have it. */
export function permissions(): Permission[] {
  const known = [...new Set(actions.map((action) => actionWords[action]))];
  return known.map((words) => {
    const meant = actions.filter((action) => actionWords[action] === words);
    return { words, roles: roles.filter((role) => meant.every((action) => may(role, action))) };
  });
}
