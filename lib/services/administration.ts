import { User } from '@/models';
import { database } from '@/lib/db';
import { notFound } from '@/lib/errors';
import type { Actor } from './access';

const proof = Symbol('site administrator');

/** That somebody administers this site. Only `administer` makes one. */
export interface Administration {
  readonly [proof]: true;
  readonly actor: Actor;
}

export async function isAdministrator(actor: Actor): Promise<boolean> {
  database();
  return (await User.findByPk(actor.userId, { attributes: ['siteAdmin'] }))?.siteAdmin === true;
}

/** A site administrator's permission; to anybody else there is no such page. It opens no group's records. */
export async function administer(actor: Actor): Promise<Administration> {
  if (!(await isAdministrator(actor))) throw notFound('page');
  return { [proof]: true, actor };
}
