import type { Role } from '@/lib/schemas';
import { AppError } from '@/lib/errors';
import { checkRules } from './check';
import { fitRules } from './fit';
import { groupRules } from './group';
import { measurementRules } from './measurement';
import { notebookRules } from './notebook';
import { scanRules } from './scan';

/** The whole of who may do what within a group, as data. Outside it nobody may do anything. */
export const rules = {
  ...groupRules,
  ...measurementRules,
  ...notebookRules,
  ...fitRules,
  ...scanRules,
  ...checkRules,
} as const;

export type Action = keyof typeof rules;
export const actions = Object.keys(rules) as readonly Action[];

export const may = (role: Role, action: Action): boolean => (rules[action] as readonly Role[]).includes(role);

/** What a role may do, of all actions or of those on one kind of record: the same rules tell pages what to offer. */
export const actionsFor = (
  role: Role,
  kind?: 'group' | 'measurement' | 'notebook' | 'fit' | 'scan' | 'check',
): Action[] =>
  actions.filter((action) => may(role, action) && (kind === undefined || action.startsWith(`${kind}.`)));

export function mayOrThrow(role: Role, action: Action): void {
  if (may(role, action)) return;
  throw new AppError('forbidden', `Your role in this group, ${role}, doesn't allow this (${action}).`);
}
