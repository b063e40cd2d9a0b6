import { describe, expect, it } from 'vitest';
import { actions, actionsFor, may, mayOrThrow, type Action } from '@/lib/policies';
import { roles, type Role } from '@/lib/schemas';

/** Who may do what, as the specification's table of roles has it: L lead, A analyst, F referee, R reader. */
const table: Record<Action, string> = {
  'group.read': 'LAFR',
  'group.leave': 'LAFR',
  'group.rename': 'L',
  'group.invite': 'L',
  'group.roles': 'L',
  'group.remove': 'L',
  'group.audit': 'LAF',
  'measurement.read': 'LAF',
  'measurement.upload': 'LA',
  'measurement.edit': 'LA',
  'measurement.delete': 'L',
  'measurement.blind': 'L',
  'notebook.read': 'LAF',
  'notebook.create': 'LA',
  'notebook.edit': 'LA',
  'notebook.archive': 'L',
  'notebook.delete': 'L',
  'fit.read': 'LAF',
  'fit.start': 'LA',
  'fit.stop': 'LA',
  'fit.resume': 'LA',
  'fit.extend': 'LA',
  'scan.read': 'LAF',
  'scan.start': 'LA',
  'check.read': 'LAF',
  'check.start': 'LA',
  'check.stop': 'LA',
};
const letters: Record<Role, string> = { lead: 'L', analyst: 'A', referee: 'F', reader: 'R' };

describe('who may do what', () => {
  it.each(actions)('%s is allowed to exactly the roles of the table', (action) => {
    for (const role of roles)
      expect([role, may(role, action)]).toEqual([role, table[action].includes(letters[role])]);
  });

  it('lists the actions of a role, of all records or of one kind', () => {
    expect(actionsFor('reader')).toEqual(['group.read', 'group.leave']);
    expect(actionsFor('referee', 'fit')).toEqual(['fit.read']);
    expect(actionsFor('lead')).toEqual([...actions]);
  });

  it('refuses with the role and the action', () => {
    expect(() => mayOrThrow('referee', 'fit.start')).toThrow(/referee.*fit\.start/);
    expect(() => mayOrThrow('analyst', 'fit.start')).not.toThrow();
  });
});
