import { StateWord } from '@/components/ui/state-word';
import { Stamp } from '@/components/ui/num';
import { DataTable } from '@/components/ui/table';
import { EmptyState } from '@/components/ui/empty-state';
import { fileSize } from '@/components/words/counts';
import { fitState } from '@/components/fit/fit-words';
import { formatCount, formatNumber } from '@/lib/figures/format';
import type { InstanceState, ServiceName, StorageState } from '@/lib/schemas';

const serviceWords: Record<ServiceName, string> = {
  database: 'database',
  queue: 'queue and messages',
  storage: 'object store',
  mail: 'mail',
};

export function ServiceTable({ services }: { services: InstanceState['services'] }) {
  return (
    <DataTable
      label="Services"
      columns={[
        { key: 'name', head: 'Service' },
        { key: 'state', head: 'State' },
        { key: 'time', head: 'Answers in, ms', numeric: true },
      ]}
      rows={services.map(({ name, state, milliseconds }) => ({
        key: name,
        cells: {
          name: serviceWords[name],
          state:
            state === 'ok' ? (
              <StateWord kind="ok">answers</StateWord>
            ) : (
              <StateWord kind="bad">doesn’t answer</StateWord>
            ),
          time: milliseconds === null ? '–' : formatNumber(milliseconds, 1),
        },
      }))}
    />
  );
}

/** Fits and checks that haven't ended, by group and notebook id: what they are about is their group's. */
export function QueueTable({ queue }: { queue: InstanceState['queue'] }) {
  const rows = [
    ...queue.fits.map((fit) => ({ ...fit, id: fit.fitId, name: 'fit', state: fitState(fit.status) })),
    ...queue.checks.map((check) => ({
      ...check,
      id: check.checkId,
      name: 'check',
      state: { kind: 'run', word: 'checking' } as const,
    })),
  ];
  if (rows.length === 0)
    return <EmptyState>No fit waits or runs. One that is started stands here until it ends.</EmptyState>;
  return (
    <DataTable
      label="Fits and checks that wait or run"
      ruled
      phoneColumns="minmax(0,1fr) auto"
      columns={[
        { key: 'group', head: 'Group', phone: { area: '1 / 1' } },
        { key: 'notebook', head: 'Notebook, fit or check', phone: { area: '2 / 1 / 3 / 3' } },
        { key: 'state', head: 'State', phone: { area: '1 / 2', end: true } },
        { key: 'since', head: 'Since', phone: { area: '3 / 1', label: 'since' } },
      ]}
      rows={rows.map((fit) => ({
        key: fit.id,
        cells: {
          group: <span className="wrap-anywhere">{fit.groupName}</span>,
          notebook: (
            <>
              <Stamp>{fit.notebookId.slice(0, 8)}</Stamp>
              <span className="sr-only"> and so on</span>, {fit.name} {fit.number}
            </>
          ),
          state: fit.held ? (
            <StateWord kind={fit.state.kind}>{fit.state.word}</StateWord>
          ) : (
            <StateWord kind="wait">waits for a worker</StateWord>
          ),
          since: <Stamp at={fit.since} />,
        },
      }))}
    />
  );
}

export function WorkerTable({ workers }: { workers: InstanceState['workers'] }) {
  if (workers === null)
    return <EmptyState>The queue doesn’t answer, so that nobody knows which workers live.</EmptyState>;
  if (workers.length === 0)
    return (
      <EmptyState>
        No worker lives. Fits wait until one is started: <code className="font-numbers">npm run worker</code>
      </EmptyState>
    );
  return (
    <DataTable
      label="Workers"
      ruled
      phoneColumns="minmax(0,1fr) auto"
      columns={[
        { key: 'where', head: 'Worker', phone: { area: '1 / 1' } },
        { key: 'version', head: 'Version', phone: 'drop' },
        { key: 'since', head: 'Since', phone: { area: '2 / 1', label: 'since' } },
        { key: 'threads', head: 'Threads a fit', numeric: true, phone: { area: '2 / 2', label: 'threads' } },
        { key: 'fits', head: 'Fits at once', numeric: true, phone: { area: '3 / 2', label: 'fits' } },
        { key: 'silent', head: 'Last beat, s', numeric: true, phone: { area: '1 / 2', label: 'beat' } },
      ]}
      rows={workers.map(({ id, host, pid, threads, fits, version, startedAt, silentFor }) => ({
        key: id,
        cells: {
          where: (
            <span className="wrap-anywhere">
              {host ?? 'starting'}
              {pid === null ? null : <span className="text-ink-2">, process {pid}</span>}
            </span>
          ),
          version: version === null ? '–' : <Stamp>{version}</Stamp>,
          threads: threads ?? '–',
          fits: fits ?? '–',
          since: startedAt === null ? '–' : <Stamp at={startedAt} />,
          silent: formatNumber(silentFor, 0),
        },
      }))}
    />
  );
}

export function StorageTable({ storage }: { storage: StorageState }) {
  const { objects, tables, tableBytes } = storage;
  return (
    <>
      <div className="border-t border-ink pt-2">
        <p>
          The tables take {fileSize(tableBytes)}.{' '}
          {objects === null
            ? 'The object store doesn’t answer, so that its objects can’t be counted.'
            : `The object store holds ${formatCount(objects.count)} ${objects.count === 1 ? 'object' : 'objects'} of ${fileSize(objects.bytes)} together.`}
        </p>
      </div>
      <DataTable
        label="Tables of the database"
        columns={[
          { key: 'name', head: 'Table' },
          { key: 'rows', head: 'Rows, about', numeric: true },
          { key: 'bytes', head: 'Size', numeric: true },
        ]}
        rows={tables.map(({ name, rows, bytes }) => ({
          key: name,
          cells: { name, rows: formatCount(rows), bytes: fileSize(bytes) },
        }))}
      />
    </>
  );
}

/** "2 running, 1 waiting", for the contents list. */
export function queueNote({ waiting, running }: InstanceState['queue']): string {
  if (waiting + running === 0) return 'idle';
  return [running ? `${running} running` : '', waiting ? `${waiting} waiting` : '']
    .filter(Boolean)
    .join(', ');
}
