import { count, id, instant, reference, table } from './table';

/** How many fits may run at once: of a group by its id, of every other one by the row named `site`. */
export const { up, down } = table('fit_limits', {
  scope: id,
  fits: count,
  set_by: reference('users'),
  set_at: instant,
});
