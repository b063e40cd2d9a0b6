import { id, instant, table, text } from './table';

export const { up, down } = table('groups', { id, name: text(120), created_at: instant });
