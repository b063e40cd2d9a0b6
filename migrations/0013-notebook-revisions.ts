import { count, id, instant, json, reference, table, text } from './table';

export const { up, down } = table(
  'notebook_revisions',
  {
    id,
    notebook_id: reference('notebooks', true),
    revision: count,
    title: text(160),
    settings: json,
    sections: json,
    created_by: reference('users'),
    created_at: instant,
  },
  { notebook_revisions_number: ['notebook_id', 'revision'] },
);
