'use client';

import dynamic from 'next/dynamic';
import Link from 'next/link';
import { useState } from 'react';
import { asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { Button, Buttons } from '@/components/ui/button';
import { Stamp } from '@/components/ui/num';
import { Subheading } from '@/components/ui/section';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';
import { capital, counted, plain } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import { shortName } from '@/components/words/people';
import { formatNumber } from '@/lib/figures/format';
import { differenceOf, type MovedPoint, type VersionDifference } from '@/lib/measurements/version-difference';
import type { AllTakenUp, Measurement } from '@/lib/schemas';
import { covarianceInWords, fileNameOf } from './measurement-words';
import { useVersion } from './use-version';

const PointsFigure = dynamic(() => import('@/components/figures/points-figure').then((m) => m.PointsFigure));

/** At most so many moved bins stand in the table. */
const listedBins = 8;

const pointsOf = ({ points }: Measurement) => ({
  kappa: points.kappa,
  S: points.S.map((value) => value ?? NaN),
  sigma: points.sigma,
});

/** "Of 40 bins, 38 are in both; two came, none went. Of those in both, five moved, the farthest by 2.1 σ." */
function sentence({ shared, added, removed, moved }: VersionDifference): string {
  const parts = [`${capital(counted(shared, 'bin'))} ${shared === 1 ? 'is' : 'are'} in both`];
  if (added) parts.push(`${counted(added, 'bin')} came`);
  if (removed) parts.push(`${counted(removed, 'bin')} went`);
  const values = moved.filter(({ inSigma }) => inSigma !== 0);
  const farthest = Math.max(0, ...values.map(({ inSigma }) => Math.abs(inSigma)));
  const how = values.length
    ? `Of those in both, ${counted(values.length, 'value')} moved, the farthest by ${formatNumber(farthest, 2)} of its standard error.`
    : 'No value in both moved.';
  const errors = moved.filter(({ errorRatio }) => Math.abs(errorRatio - 1) > 1e-9).length;
  return `${parts.join(', ')}. ${how}${errors ? ` ${capital(counted(errors, 'error'))} changed.` : ''}`;
}

function MovedTable({ moved, from, to }: { moved: readonly MovedPoint[]; from: number; to: number }) {
  const farthest = [...moved].sort((a, b) => Math.abs(b.inSigma) - Math.abs(a.inSigma));
  const shown = farthest.slice(0, listedBins);
  return (
    <DataTable
      label="Bins that moved"
      caption={
        moved.length > shown.length
          ? `The ${shown.length} bins that moved farthest, of ${moved.length}.`
          : 'Bins that moved, the farthest first.'
      }
      columns={[
        { key: 'kappa', head: <Sym base="κ" />, numeric: true },
        { key: 'before', head: `S, version ${from}`, numeric: true },
        { key: 'after', head: `S, version ${to}`, numeric: true },
        { key: 'shift', head: 'shift / σ', numeric: true },
        { key: 'ratio', head: 'ratio of errors', numeric: true, phone: 'drop' },
      ]}
      rows={shown.map((point) => ({
        key: String(point.kappa),
        cells: {
          kappa: plain(point.kappa, 3),
          before: formatNumber(point.before, 3),
          after: formatNumber(point.after, 3),
          shift: formatNumber(point.inSigma, 2),
          ratio: formatNumber(point.errorRatio, 2),
        },
      }))}
    />
  );
}

/** What the shown version changed against the one before it. */
function Difference({ measurement, before }: { measurement: Measurement; before: number }) {
  const older = useVersion(measurement, before);
  const { name, version, blind } = measurement;
  if (older.version !== before) return <div className="h-[280px]" aria-hidden="true" />;
  const difference = differenceOf(pointsOf(older), pointsOf(measurement));
  const moved = difference.moved.filter(({ inSigma }) => Number.isFinite(inSigma));
  const sigma = new Map(measurement.points.kappa.map((kappa, i) => [kappa, measurement.points.sigma[i]]));
  return (
    <>
      <Subheading>
        Version {version} against version {before}
      </Subheading>
      <p>
        {sentence(difference)}{' '}
        {covarianceInWords(older) === covarianceInWords(measurement)
          ? `${capital(covarianceInWords(measurement))} in both.`
          : `${capital(covarianceInWords(older))} before, ${covarianceInWords(measurement)} now.`}
      </p>
      {moved.length && !blind ? (
        <>
          <PointsFigure
            label={`Differences of ${name} between version ${before} and ${version}`}
            fileName={`${fileNameOf(name)}-version-${before}-to-${version}`}
            yName="ΔS"
            points={{
              kappa: moved.map(({ kappa }) => kappa),
              value: moved.map(({ before: old, after }) => after - old),
              error: moved.map(({ kappa }) => sigma.get(kappa) ?? NaN),
            }}
            caption={
              <>
                <Sym base="S" /> of version {version} less that of version {before}, in the{' '}
                {counted(moved.length, 'bin')} that moved; the bars are the standard errors of version{' '}
                {version}.
              </>
            }
          />
          <MovedTable moved={moved} from={before} to={version} />
        </>
      ) : null}
    </>
  );
}

/** What came of the command for all notebooks. */
function Outcome({ done }: { done: AllTakenUp }) {
  return (
    <div role="status">
      {done.notebooks.map(({ id, number, title, revision, fits, skipped, dropped }) => (
        <p key={id} className="mb-1 text-small">
          <Link href={`/notebooks/${id}#shifts`}>
            Notebook {number}, {title}
          </Link>
          , stands at revision {revision}; {counted(fits.length, 'fit')} queued
          {skipped.length ? `, ${counted(skipped.length, 'fit')} not repeated` : ''}
          {dropped.length
            ? `; left out before and not in this version: bin ${dropped.map(({ bin, reason }) => `${bin} (${reason})`).join(', ')}`
            : ''}
          .
        </p>
      ))}
      {done.refused.map(({ id, number, title, reason }) => (
        <p key={id} className="mb-1 text-small">
          <Link href={`/notebooks/${id}`}>
            Notebook {number}, {title}
          </Link>
          , stays where it is. {reason}
        </p>
      ))}
    </div>
  );
}

/** Notebooks that rest on it, and the one command that moves those on an older version. */
export function RestingBody({ measurement, onChange }: { measurement: Measurement; onChange: () => void }) {
  const { id, resting, newest, may } = measurement;
  const [busy, setBusy] = useState(false);
  const [done, setDone] = useState<AllTakenUp | null>(null);
  const [error, setError] = useState<RequestError | null>(null);
  const older = resting.filter(({ version }) => version < newest).length;

  async function takeUpAll() {
    setBusy(true);
    setError(null);
    try {
      setDone(await send<AllTakenUp>('POST', `/api/v1/measurements/${id}/take-up`, { version: newest }));
      onChange();
    } catch (thrown) {
      setError(asRequestError(thrown));
    } finally {
      setBusy(false);
    }
  }

  return (
    <>
      {resting.length ? (
        <DataTable
          label="Notebooks that rest on it"
          columns={[
            { key: 'notebook', head: 'Notebook' },
            { key: 'version', head: 'on version', numeric: true },
          ]}
          rows={resting.map(({ id: notebook, number, title, version }) => ({
            key: notebook,
            cells: {
              notebook: (
                <Link href={`/notebooks/${notebook}`}>
                  {number}, {title}
                </Link>
              ),
              version: version < newest ? `${version}, an older one` : String(version),
            },
          }))}
        />
      ) : (
        <p className="text-ink-2">No notebook rests on it yet.</p>
      )}
      {older > 0 && may.includes('notebook.edit') ? (
        <>
          <Buttons>
            <Button onClick={() => void takeUpAll()} reason={busy ? 'The fits are being queued.' : undefined}>
              Take up version {newest} in {counted(older, 'notebook')} and run all fits again
            </Button>
          </Buttons>
          <p className="text-small text-ink-2">
            Each becomes a new revision of its notebook; finished fits are repeated with their own settings
            and seeds, and each notebook shows how its results moved.
          </p>
        </>
      ) : null}
      {done ? <Outcome done={done} /> : null}
      <RequestMessage error={error} title={`Version ${newest} was not taken up`} />
    </>
  );
}

/** Every version, and what the shown one changed. */
export function VersionsBody({ measurement }: { measurement: Measurement }) {
  const { id, version: shown, versions } = measurement;
  const before = versions.find(({ version }) => version < shown)?.version;
  return (
    <>
      <DataTable
        label="Versions"
        columns={[
          { key: 'version', head: 'Version' },
          { key: 'bins', head: 'bins', numeric: true },
          { key: 'range', head: 'Range' },
          { key: 'covariance', head: 'Covariance', phone: 'drop' },
          { key: 'fits', head: 'fits', numeric: true },
          { key: 'by', head: 'Stored by', phone: 'drop' },
          { key: 'at', head: 'Stored', phone: 'drop' },
        ]}
        rows={versions.map((line) => ({
          key: String(line.version),
          cells: {
            version:
              line.version === shown ? (
                <b className="whitespace-nowrap">{line.version}, shown here</b>
              ) : (
                <Link className="whitespace-nowrap" href={`/measurements/${id}?version=${line.version}`}>
                  Show version {line.version}
                </Link>
              ),
            bins: String(line.rows),
            range: <KappaRange lo={line.kappaMin} hi={line.kappaMax} />,
            covariance: covarianceInWords(line),
            fits: String(line.fits),
            by: shortName(line.uploadedBy),
            at: <Stamp at={line.uploadedAt} />,
          },
        }))}
      />
      {before === undefined ? null : <Difference measurement={measurement} before={before} />}
    </>
  );
}
