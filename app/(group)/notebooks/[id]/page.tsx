import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { FormulaBlock } from '@/components/notebook/formula-block';
import { NotebookSheet } from '@/components/notebook/notebook-sheet';
import { packMeasurement } from '@/components/notebook/packed-measurement';
import {
  checks,
  fit,
  measurement,
  notebook,
  roleAt,
  statement,
  trials,
  version,
  visitor,
} from '@/lib/http/page-data';
import { defaultFit } from '@/lib/schemas';
import { findTemplate, withTheory } from '@/lib/templates';

interface Props {
  params: Promise<{ id: string }>;
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  const { id } = await params;
  return { title: (await notebook(await visitor(`/notebooks/${id}`), id)).title };
}

/** `?fit=2` shows that fit; without it the last one is shown. */
export default async function NotebookPage({ params, searchParams }: Props) {
  const { id } = await params;
  const actor = await visitor(`/notebooks/${id}`);
  const opened = await notebook(actor, id);
  const [measured, further, role, words, looks, checked] = await Promise.all([
    measurement(actor, opened.measurement.id, opened.measurement.version),
    Promise.all(opened.also.map((each) => measurement(actor, each.id, each.version))),
    roleAt(actor, id),
    statement(actor, id),
    trials(actor, id),
    checks(actor, id),
  ]);
  const wanted = Number((await searchParams).fit);
  const last = Math.max(0, ...opened.fits.map(({ number }) => number));
  const summary =
    opened.fits.find(({ number }) => number === wanted) ?? opened.fits.find(({ number }) => number === last);
  const shown = summary ? await fit(actor, summary.id) : null;
  const formula = withTheory(
    findTemplate(opened.template.id).formula(opened.template.options),
    measured.theory,
  );
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={role}
      where={opened.groupName}
      groupId={opened.groupId}
      current="notebooks"
    >
      <NotebookSheet
        notebook={opened}
        measurement={packMeasurement(measured)}
        further={further.map(packMeasurement)}
        fit={shown}
        statement={words}
        trials={looks}
        checks={checked}
        formula={{ tex: formula.wide, node: <FormulaBlock formula={formula} /> }}
        defaults={{ ...defaultFit }}
        reader={actor.userId}
      />
    </PageChrome>
  );
}
