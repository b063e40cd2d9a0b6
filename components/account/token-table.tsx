'use client';

import { Stamp } from '@/components/ui/num';
import { DataTable } from '@/components/ui/table';
import { WordButton } from '@/components/ui/word-button';
import type { Token } from '@/lib/schemas';

/** One's tokens with when they were made and used; those that still work can be revoked. */
export function TokenTable({
  tokens,
  onRevoke,
}: {
  tokens: readonly Token[];
  onRevoke: (token: Token) => void;
}) {
  return (
    <DataTable
      label="Personal tokens"
      ruled
      phoneColumns="minmax(0,1fr) auto"
      columns={[
        { key: 'name', head: 'Name', phone: { area: '1 / 1' } },
        { key: 'made', head: 'Made', phone: { area: '2 / 1', label: 'made' } },
        { key: 'used', head: 'Last used', phone: { area: '3 / 1', label: 'last used' } },
        { key: 'revoked', head: 'Revoked', phone: { area: '1 / 2', end: true } },
      ]}
      rows={tokens.map((token) => ({
        key: token.id,
        cells: {
          name: <span className="wrap-anywhere">{token.name}</span>,
          made: <Stamp at={token.createdAt} />,
          used: token.lastUsedAt ? <Stamp at={token.lastUsedAt} /> : 'never',
          revoked: token.revokedAt ? (
            <>
              <span className="hidden font-controls text-note text-ink-2 max-tablet:inline">revoked </span>
              <Stamp at={token.revokedAt} />
            </>
          ) : (
            <WordButton of={token.name} onClick={() => onRevoke(token)}>
              Revoke
            </WordButton>
          ),
        },
      }))}
    />
  );
}
