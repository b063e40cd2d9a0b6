'use client';

import Link from 'next/link';
import useSWR from 'swr';
import { detailAt, read, type RequestError } from '@/components/api/request';
import { MeasurementFigure } from '@/components/measurement/measurement-figure';
import { covarianceInWords } from '@/components/measurement/measurement-words';
import { CheckField, FieldPair, SelectField } from '@/components/ui/field';
import { NumberField } from '@/components/ui/number-field';
import { Subheading } from '@/components/ui/section';
import { Sym } from '@/components/ui/sym';
import { WordButton } from '@/components/ui/word-button';
import { capital, counted, inWords, plain } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import type { Measurement, MeasurementListed, Notebook } from '@/lib/schemas';
import { keptRows } from './kept-points';
import { mostMeasurements, type FurtherChoice } from './further-words';
import type { VersionOf } from './use-further';

export interface FurtherMeasurementsProps {
  notebook: Notebook;
  chosen: readonly FurtherChoice[];
  /** Those measurements, where they are there yet. */
  measurements: readonly Measurement[];
  sharedMocks: boolean;
  editable: boolean;
  error: RequestError | null;
  onChosen: (next: FurtherChoice[], sharedMocks: boolean) => void;
}

/** Changes one of the ends of a cut; an empty one is left out. */
const withEnd = (cuts: Notebook['cuts'], end: 'kappaMin' | 'kappaMax', value: number | null) => {
  const { [end]: before, ...rest } = cuts;
  return value === null || (value === undefined && before === undefined) ? rest : { ...rest, [end]: value };
};

/** The measurements that are fitted together with the notebook's own: each with its points and cut; one more, or one less. */
export function FurtherMeasurements(props: FurtherMeasurementsProps) {
  const { notebook, chosen, measurements, sharedMocks, editable, error, onChosen } = props;
  const change = (at: number, next: Partial<FurtherChoice>) =>
    onChosen(
      chosen.map((each, k) => (k === at ? { ...each, ...next } : each)),
      sharedMocks,
    );
  return (
    <>
      {chosen.length || editable ? <Subheading>Fitted together with it</Subheading> : null}
      {chosen.length ? (
        <p>
          {capital(counted(chosen.length + 1, 'measurement'))} in one fit: masses, angles and amplitudes are
          shared, and each has a background of its own, whose parameters end with its number.
        </p>
      ) : null}
      {chosen.map((each, k) => {
        const measurement = measurements.find(
          ({ id, version }) => id === each.measurement && version === each.version,
        );
        const newest = notebook.also.find(({ id }) => id === each.measurement)?.newest ?? each.version;
        return (
          <div key={each.measurement} data-further={k + 2}>
            {measurement ? (
              <Further
                measurement={measurement}
                number={k + 2}
                cuts={each.cuts}
                editable={editable}
                error={error}
                place={k}
                onCuts={(cuts) => change(k, { cuts })}
              />
            ) : (
              <p className="text-ink-2">The measurement is being read.</p>
            )}
            {editable ? (
              <p className="no-print flex flex-wrap gap-x-3 font-controls text-note">
                <WordButton
                  onClick={() => {
                    const left = chosen.filter((_, at) => at !== k);
                    onChosen(left, sharedMocks && left.length > 0);
                  }}
                >
                  take {measurement?.name ?? 'it'} out
                </WordButton>
                {newest > each.version ? (
                  <WordButton onClick={() => change(k, { version: newest })}>
                    take up its version {newest}
                  </WordButton>
                ) : null}
              </p>
            ) : null}
          </div>
        );
      })}
      {editable ? <Adding {...props} /> : null}
      {sharedMocks && !editable ? (
        <p>Their mocks are of the same simulated skies: one covariance holds for all.</p>
      ) : null}
    </>
  );
}

function Further({
  measurement,
  number,
  cuts,
  editable,
  error,
  place,
  onCuts,
}: {
  measurement: Measurement;
  number: number;
  cuts: Notebook['cuts'];
  editable: boolean;
  error: RequestError | null;
  place: number;
  onCuts: (cuts: Notebook['cuts']) => void;
}) {
  const rows = keptRows(measurement.points, cuts);
  const { id, name, version } = measurement;
  const path = `alsoMeasurements.${place}.cuts`;
  return (
    <>
      <p>
        <span className="font-num">{number}.</span>{' '}
        <Link href={`/measurements/${id}?version=${version}`}>
          {name}, version {version}
        </Link>
        :{' '}
        {rows.length === measurement.rows
          ? `all ${counted(rows.length, 'bin')} kept`
          : `${rows.length} of ${counted(measurement.rows, 'bin')} kept`}
        , {covarianceInWords(measurement)}.
      </p>
      <MeasurementFigure
        measurement={measurement}
        kept={rows}
        caption={
          <>
            {capital(counted(rows.length, 'bin'))} of {name} against <Sym base="κ" />.
          </>
        }
      />
      {editable ? (
        <FieldPair>
          <NumberField
            label={
              <>
                Lowest <Sym base="κ" /> of {name}
              </>
            }
            name={`kappaMin-${number}`}
            value={cuts.kappaMin ?? null}
            onValue={(value) => onCuts(withEnd(cuts, 'kappaMin', value ?? null))}
            error={detailAt(error, `${path}.kappaMin`)}
            help="Empty: no cut."
          />
          <NumberField
            label={
              <>
                Highest <Sym base="κ" /> of {name}
              </>
            }
            name={`kappaMax-${number}`}
            value={cuts.kappaMax ?? null}
            onValue={(value) => onCuts(withEnd(cuts, 'kappaMax', value ?? null))}
            error={detailAt(error, `${path}.kappaMax`) ?? detailAt(error, path)}
            help={`It covers ${plain(measurement.kappaMin, 3)} to ${plain(measurement.kappaMax, 3)}.`}
          />
        </FieldPair>
      ) : (
        <p>
          Cut: <KappaRange lo={cuts.kappaMin} hi={cuts.kappaMax} />.
        </p>
      )}
    </>
  );
}

/** The group's others to choose from, and whether what is chosen has its mocks in common. */
function Adding({ notebook, chosen, sharedMocks, error, onChosen }: FurtherMeasurementsProps) {
  const { data } = useSWR(`/api/v1/groups/${notebook.groupId}/measurements`, read<MeasurementListed[]>, {
    revalidateOnFocus: false,
  });
  const taken = new Set([notebook.measurement.id, ...chosen.map(({ measurement }) => measurement)]);
  const others = (data ?? []).filter(({ id }) => !taken.has(id));
  const full = chosen.length + 1 >= mostMeasurements;
  const fault =
    detailAt(error, 'alsoMeasurements') ??
    error?.details.find(({ path }) => /^alsoMeasurements\.\d+\.(measurement|version)$/.test(path ?? ''))
      ?.message;
  return (
    <FieldPair>
      <SelectField
        label="Fit another measurement with it"
        name="further"
        value=""
        disabled={full || others.length === 0}
        options={[
          { value: '', label: 'none' },
          ...others.map(({ id, name, version, rows }) => ({
            value: id,
            label: `${name}, version ${version} (${rows} bins)`,
          })),
        ]}
        onChange={(event) => {
          const found = others.find(({ id }) => id === event.target.value);
          if (!found) return;
          onChosen([...chosen, { measurement: found.id, version: found.version, cuts: {} }], sharedMocks);
        }}
        error={fault}
        help={
          full
            ? `A notebook has at most ${inWords(mostMeasurements)}.`
            : data && others.length === 0
              ? 'The group has no other measurement.'
              : 'A measurement of the group that the same fields are to explain.'
        }
      />
      {chosen.length ? (
        <div>
          <CheckField
            label="Their mocks are of the same skies"
            name="sharedMocks"
            checked={sharedMocks}
            onChange={(event) => onChosen([...chosen], event.target.checked)}
            help="Row i of every file of mocks is one simulation: then one covariance of all is made from them. Else the measurements are taken as independent."
          />
          {detailAt(error, 'sharedMocks') ? (
            <p className="mb-0 font-controls text-note text-bad">{detailAt(error, 'sharedMocks')}</p>
          ) : null}
        </div>
      ) : null}
    </FieldPair>
  );
}

/** What of the choice is to be read. */
export const versionsOf = (chosen: readonly FurtherChoice[]): VersionOf[] =>
  chosen.map(({ measurement, version }) => ({ id: measurement, version }));
