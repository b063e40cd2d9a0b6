import { count, id, instant, maybeInstant, reference, table, text } from './table';

/** Mails about the end of a fit that are due or went out: one for each end, which an epoch has one of. */
export const { up, down } = table(
  'fit_mails',
  {
    id,
    fit_id: reference('fits', true),
    epoch: count,
    user_id: reference('users', true),
    ended_as: text(16),
    created_at: instant,
    attempts: { ...count, defaultValue: 0 },
    held_until: maybeInstant,
    sent_at: maybeInstant,
  },
  { fit_mails_end: ['fit_id', 'epoch'] },
);
