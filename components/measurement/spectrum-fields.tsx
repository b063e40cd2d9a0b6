'use client';

import dynamic from 'next/dynamic';
import { SelectField } from '@/components/ui/field';
import { NumberField } from '@/components/ui/number-field';
import { StateWord } from '@/components/ui/state-word';
import { Subheading } from '@/components/ui/section';
import { Sym } from '@/components/ui/sym';
import type { Finding, PowerSpectrum } from '@/lib/measurements';
import { ofSpectrum } from './columns-table';
import type { ColumnView } from './preflight-view';

/** The typesetter is large, and comes where a bispectrum is read. */
export const SpectrumFormula = dynamic(
  () => import('./spectrum-formula').then((module) => module.SpectrumFormula),
  { ssr: false, loading: () => <div className="formula" /> },
);

const units = { wavenumberUnit: ['1/Mpc', 'h/Mpc'], bispectrumUnit: ['Mpc^6', '(Mpc/h)^6'] } as const;

/** A unit to choose, or the one that the file says. */
function UnitField({
  label,
  name,
  said,
  value,
  onValue,
}: {
  label: string;
  name: keyof typeof units;
  said: string | null;
  value: string | undefined;
  onValue: (value: string | undefined) => void;
}) {
  const choices =
    said === null ? units[name].map((unit) => ({ value: unit as string, label: unit as string })) : [];
  return (
    <SelectField
      label={label}
      name={name}
      value={said === null ? (value ?? '') : 'said'}
      options={
        said === null
          ? [{ value: '', label: 'not chosen yet' }, ...choices]
          : [{ value: 'said', label: `${said}, as the file says` }]
      }
      onChange={({ target }) => onValue(target.value === '' ? undefined : target.value)}
    />
  );
}

/** Units that the file gives behind the names of its wavenumbers and of B. */
export function saidUnits(columns: readonly ColumnView[]) {
  const of = (roles: readonly (string | null)[]) =>
    columns.find(({ role, unit }) => roles.includes(role) && unit !== null)?.unit ?? null;
  return { wavenumber: of(['kLong', 'kShort', 'k1', 'k2', 'k3']), bispectrum: of(['B']) };
}

/** The power spectrum by which the column B becomes S, with the formula that does it. */
export function SpectrumFields({
  columns,
  checks,
  value,
  onValue,
}: {
  columns: readonly ColumnView[];
  checks: readonly Finding[];
  value: PowerSpectrum;
  onValue: (value: PowerSpectrum) => void;
}) {
  const said = saidUnits(columns);
  const set = (key: keyof PowerSpectrum) => (next: string | number | null | undefined) => {
    const { [key]: before, ...others } = value;
    if (before !== next) onValue(next === null || next === undefined ? others : { ...others, [key]: next });
  };
  return (
    <>
      <Subheading>Power spectrum</Subheading>
      <p>
        The file gives the bispectrum <Sym base="B" />. It becomes the shape function <Sym base="S" />, and
        its covariance or mocks with it, by the power spectrum that is given here:
      </p>
      <SpectrumFormula />
      {/* As tall without a fault as with one: the fields don't jump under the hand that fills them. */}
      <div role="status" className="min-h-[42px] max-w-figure text-small">
        {checks
          .filter(({ code }) => ofSpectrum.has(code))
          .map(({ code, message }) => (
            <p key={`${code} ${message}`} className="mb-0">
              <StateWord kind="bad">Error</StateWord> {message}
            </p>
          ))}
      </div>
      <div className="grid max-w-figure grid-cols-4 gap-4 max-tablet:grid-cols-1 max-tablet:gap-2">
        <NumberField
          label={
            <>
              Amplitude <Sym base="A" sub="s" />
            </>
          }
          name="amplitude"
          value={value.amplitude ?? null}
          onValue={set('amplitude')}
          help="Such as 2.1e-9."
        />
        <NumberField
          label={
            <>
              Tilt <Sym base="n" sub="s" />
            </>
          }
          name="tilt"
          value={value.tilt ?? null}
          onValue={set('tilt')}
          help="1 for none."
        />
        <NumberField
          label={
            <>
              Pivot <Sym base="k" sub="∗" />
            </>
          }
          name="pivot"
          value={value.pivot ?? null}
          onValue={set('pivot')}
          help="Not needed without a tilt."
        />
        <SelectField
          label="Unit of the pivot"
          name="pivotUnit"
          value={value.pivotUnit ?? '1/Mpc'}
          options={units.wavenumberUnit.map((unit) => ({ value: unit, label: unit }))}
          onChange={({ target }) => set('pivotUnit')(target.value)}
        />
      </div>
      <div className="mt-2 grid max-w-figure grid-cols-3 gap-4 max-tablet:grid-cols-1 max-tablet:gap-2">
        <UnitField
          label="Unit of the wavenumbers"
          name="wavenumberUnit"
          said={said.wavenumber}
          value={value.wavenumberUnit}
          onValue={set('wavenumberUnit')}
        />
        <UnitField
          label="Unit of B"
          name="bispectrumUnit"
          said={said.bispectrum}
          value={value.bispectrumUnit}
          onValue={set('bispectrumUnit')}
        />
        <NumberField
          label={<Sym base="h" />}
          name="h"
          value={value.h ?? null}
          onValue={set('h')}
          help="Where units with and without h meet."
        />
      </div>
    </>
  );
}
