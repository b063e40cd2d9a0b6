'use client';

import useSWR from 'swr';
import { read } from '@/components/api/request';
import { PointsSpark } from '@/components/figures/points-spark';
import { IndexEntry, IndexList } from '@/components/ui/index-list';
import type { State } from '@/components/ui/state-word';
import { counted } from '@/components/words/counts';
import { dayAndMonth } from '@/components/words/dates';
import { KappaRange } from '@/components/words/kappa';
import { shortName } from '@/components/words/people';
import type { Measurement, MeasurementSummary } from '@/lib/schemas';

/** What its checks came to: warnings by number, else how many passed. */
export function checksState(checks: Measurement['checks']): State {
  const warnings = checks.filter(({ level }) => level === 'warning').length;
  if (warnings) return { kind: 'warn', word: counted(warnings, 'warning').replace('one', '1') };
  return { kind: 'ok', word: `${checks.filter(({ level }) => level === 'ok').length} checks` };
}

/** Points and checks come after the page; until then the entry keeps their room. */
function Entry({ summary, number }: { summary: MeasurementSummary; number: number }) {
  const { data } = useSWR(`/api/v1/measurements/${summary.id}`, read<Measurement>, {
    revalidateOnFocus: false,
  });
  const { id, name, version, rows, kappaMin, kappaMax, simulated, blind, description } = summary;
  const states: State[] = [
    ...(blind ? [{ kind: 'blind', word: 'blind' } as const] : []),
    ...(data ? [checksState(data.checks)] : []),
  ];
  return (
    <IndexEntry
      number={number}
      title={`${name}, version ${version}`}
      href={`/measurements/${id}`}
      states={states}
      note={`${dayAndMonth(summary.uploadedAt)}, ${shortName(summary.uploadedBy)}`}
      figure={
        data && !data.blind ? (
          <PointsSpark
            kappa={data.points.kappa}
            value={data.points.S.map((value) => value ?? NaN)}
            error={data.points.sigma}
            label={`Points of ${name}`}
          />
        ) : (
          <div className="h-[35px]" />
        )
      }
    >
      {counted(rows, 'bin').replace(/^one/, 'One')}, <KappaRange lo={kappaMin} hi={kappaMax} />
      {simulated ? '; simulated' : ''}.{description ? ` ${description}` : ''}
      {blind ? ' Values are withheld while it is blind.' : ''}
    </IndexEntry>
  );
}

export function MeasurementIndex({ measurements }: { measurements: readonly MeasurementSummary[] }) {
  return (
    <IndexList>
      {measurements.map((summary, i) => (
        <Entry key={summary.id} summary={summary} number={measurements.length - i} />
      ))}
    </IndexList>
  );
}
