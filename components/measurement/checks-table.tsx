'use client';

import { useState } from 'react';
import { StateWord, type StateKind } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { capital, inWords } from '@/components/words/counts';
import type { Check } from '@/lib/schemas';
import { partWords } from './part-words';

const signs: Record<Check['level'], StateKind> = { error: 'bad', warning: 'warn', note: 'open', ok: 'ok' };

/** "line 33, col. 3", else the file it is about. */
export function placeOf({ part, line, column }: Check): string {
  const place = [
    line === undefined ? null : `line ${line}`,
    column === undefined ? null : `col. ${column}`,
  ].filter((word) => word !== null);
  if (part && part !== 'file') place.unshift(partWords[part]);
  return place.length ? place.join(', ') : partWords[part ?? 'file'];
}

/** At most so many passed checks stand open. */
const openPassed = 3;

export function ChecksTable({ checks }: { checks: readonly Check[] }) {
  const [all, setAll] = useState(false);
  const order = { error: 0, warning: 1, note: 2, ok: 3 };
  const sorted = [...checks].sort((a, b) => order[a.level] - order[b.level]);
  const passed = sorted.filter(({ level }) => level === 'ok');
  const hidden = all ? 0 : Math.max(0, passed.length - openPassed);
  const shown = sorted.slice(0, sorted.length - hidden);
  return (
    <>
      <DataTable
        ruled
        label="Checks"
        phoneColumns="96px 1fr"
        columns={[
          { key: 'level', head: 'Level', phone: { area: '1 / 1' } },
          { key: 'where', head: 'Where', phone: { area: '1 / 2' } },
          { key: 'finding', head: 'Finding', phone: { area: '2 / 1 / 3 / 3' } },
          { key: 'remedy', head: 'Remedy', phone: { area: '3 / 1 / 4 / 3' } },
        ]}
        rows={shown.map((check, i) => ({
          key: String(i),
          cells: {
            level: <StateWord kind={signs[check.level]}>{check.level}</StateWord>,
            where: <span className="font-numbers text-record whitespace-nowrap">{placeOf(check)}</span>,
            finding: check.message,
            remedy: check.remedy ? <span className="max-tablet:text-ink-2">{check.remedy}</span> : null,
          },
        }))}
      />
      {passed.length > openPassed ? (
        <p className="text-small">
          <button
            type="button"
            className="min-h-target text-action underline decoration-1 underline-offset-[3px]"
            aria-expanded={all}
            onClick={() => setAll(!all)}
          >
            {all
              ? 'Fold the checks that passed'
              : `${capital(inWords(hidden))} more ${hidden === 1 ? 'check' : 'checks'} passed`}
          </button>
        </p>
      ) : null}
    </>
  );
}
