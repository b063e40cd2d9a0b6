import { id, instant, maybeInstant, reference, sha256, table, text } from './table';

export const { up, down } = table(
  'api_tokens',
  {
    id,
    user_id: reference('users', true),
    name: text(120),
    token_hash: sha256,
    created_at: instant,
    last_used_at: maybeInstant,
    revoked_at: maybeInstant,
  },
  { api_tokens_hash: ['token_hash'] },
);
