import { id, maybe, reference, table, text } from './table';

export const { up, down } = table(
  'accounts',
  {
    id,
    type: text(255),
    provider: text(255),
    provider_account_id: text(255),
    user_id: maybe(reference('users', true)),
  },
  { accounts_provider_account: ['provider', 'provider_account_id'] },
);
