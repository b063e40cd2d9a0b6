'use client';

import { useDeferredValue, useState } from 'react';
import useSWR from 'swr';
import { read } from '@/components/api/request';
import { PointsSpark } from '@/components/figures/points-spark';
import { groupContents } from '@/components/group/group-sheet';
import { Button } from '@/components/ui/button';
import { Contents } from '@/components/ui/contents';
import { EmptyState } from '@/components/ui/empty-state';
import { Field, SelectField } from '@/components/ui/field';
import { IndexEntry, IndexList } from '@/components/ui/index-list';
import { SingleTone } from '@/components/ui/motif';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import type { State } from '@/components/ui/state-word';
import { capital, counted } from '@/components/words/counts';
import { dayAndMonth } from '@/components/words/dates';
import { KappaRange } from '@/components/words/kappa';
import { shortName } from '@/components/words/people';
import type { Group, MeasurementListed } from '@/lib/schemas';
import { found, orders, type Order } from './library-order';
import { covarianceInWords } from './measurement-words';

function statesOf({ blind, checks: { warnings, passed } }: MeasurementListed): State[] {
  const checked: State = warnings
    ? { kind: 'warn', word: `${warnings} ${warnings === 1 ? 'warning' : 'warnings'}` }
    : { kind: 'ok', word: `${passed} checks` };
  return [...(blind ? [{ kind: 'blind', word: 'blind' } as const] : []), checked];
}

function Entry({ one, number }: { one: MeasurementListed; number: number }) {
  const { id, name, version, rows, kappaMin, kappaMax, simulated, blind, description, notebooks } = one;
  return (
    <IndexEntry
      number={number}
      title={`${name}, version ${version}`}
      href={`/measurements/${id}`}
      states={statesOf(one)}
      note={`${dayAndMonth(one.uploadedAt)}, ${shortName(one.uploadedBy)}`}
      figure={
        blind ? (
          <div className="h-[35px]" />
        ) : (
          <PointsSpark
            kappa={one.points.kappa}
            value={one.points.S.map((value) => value ?? NaN)}
            error={one.points.sigma}
            label={`Points of ${name}`}
          />
        )
      }
    >
      {capital(counted(rows, 'bin'))}, <KappaRange lo={kappaMin} hi={kappaMax} />; {covarianceInWords(one)}
      {simulated ? '; simulated' : ''}. {description}
      {description && !/[.!?]$/.test(description) ? '.' : ''}{' '}
      {notebooks ? `${capital(counted(notebooks, 'notebook'))} on it.` : 'No notebook on it yet.'}
      {blind ? ' Values are withheld while it is blind.' : ''}
    </IndexEntry>
  );
}

function Search({
  search,
  onSearch,
  order,
  onOrder,
}: {
  search: string;
  onSearch: (search: string) => void;
  order: Order;
  onOrder: (order: Order) => void;
}) {
  return (
    <search className="no-print mb-3 grid max-w-figure grid-cols-[minmax(0,1fr)_200px] gap-4 max-tablet:grid-cols-1 max-tablet:gap-2">
      <Field
        type="search"
        label="Search by words"
        name="search"
        autoComplete="off"
        value={search}
        onChange={(event) => onSearch(event.target.value)}
        help="In names, descriptions, covariances and who stored it."
      />
      <SelectField
        label="Order"
        name="order"
        value={order}
        options={orders.map((each) => ({ ...each }))}
        onChange={(event) => onOrder(event.target.value as Order)}
      />
    </search>
  );
}

/** Every measurement of the group, with its points in small; searched by words and sorted. */
export function LibrarySheet({ group, initial }: { group: Group; initial: MeasurementListed[] }) {
  const { data: measurements = initial } = useSWR(
    `/api/v1/groups/${group.id}/measurements`,
    read<MeasurementListed[]>,
    { fallbackData: initial, revalidateOnMount: false },
  );
  const [search, setSearch] = useState('');
  const [order, setOrder] = useState<Order>('newest');
  const sought = useDeferredValue(search);
  const shown = found(measurements, sought, order);
  const home = `/groups/${group.id}`;
  const here = `${home}/measurements`;
  const entries = groupContents(group).map((entry) =>
    entry.href === '#measurements'
      ? { ...entry, number: measurements.length, href: here }
      : { ...entry, href: entry.href.startsWith('#') ? `${home}${entry.href}` : entry.href },
  );
  const add = group.may.includes('measurement.upload') ? (
    <Button kind={measurements.length ? 'default' : 'primary'} href={`${here}/new`}>
      Add a measurement
    </Button>
  ) : null;
  return (
    <Sheet contents={<Contents label="Of this group" entries={entries} current={here} />}>
      <PageHead title="Measurements" kicker={group.name}>
        {measurements.length ? null : <SingleTone />}
      </PageHead>
      <SheetRow>
        {measurements.length ? (
          <>
            <Search search={search} onSearch={setSearch} order={order} onOrder={setOrder} />
            <div className="mb-1 flex min-h-[49px] items-center gap-3">
              <p role="status" className="mb-0 text-small text-ink-2">
                {sought.trim()
                  ? `${capital(counted(shown.length, 'measurement'))} of ${measurements.length}`
                  : capital(counted(measurements.length, 'measurement'))}
              </p>
              <div className="no-print ml-auto">{add}</div>
            </div>
            {shown.length ? (
              <IndexList>
                {shown.map((one) => (
                  <Entry
                    key={one.id}
                    one={one}
                    number={measurements.length - measurements.findIndex(({ id }) => id === one.id)}
                  />
                ))}
              </IndexList>
            ) : (
              <EmptyState
                actions={
                  <Button onClick={() => setSearch('')}>Show all {String(measurements.length)}</Button>
                }
              >
                No measurement has all of these words. Fewer words find more.
              </EmptyState>
            )}
          </>
        ) : (
          <EmptyState actions={add}>
            No measurement yet. A file of binned points comes first, with mocks or a covariance; notebooks are
            opened on it.
          </EmptyState>
        )}
      </SheetRow>
    </Sheet>
  );
}
