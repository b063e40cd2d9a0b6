import type { Metadata } from 'next';
import { notFound } from 'next/navigation';
import { PageChrome } from '@/components/account/page-chrome';
import { CreateNotebookForm } from '@/components/notebook/create-notebook-form';
import { Button } from '@/components/ui/button';
import { EmptyState } from '@/components/ui/empty-state';
import { PageHead } from '@/components/ui/section';
import { Sheet, SheetRow } from '@/components/ui/sheet';
import { group, version, visitor } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'New notebook' };

interface Props {
  params: Promise<{ id: string }>;
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}

export default async function NewNotebookPage({ params, searchParams }: Props) {
  const { id } = await params;
  const actor = await visitor(`/groups/${id}/notebooks/new`);
  const { name, role, may, measurements } = await group(actor, id);
  if (!may.includes('notebook.create')) notFound();
  const wanted = (await searchParams).measurement;
  return (
    <PageChrome
      version={version}
      email={actor.email}
      role={role}
      where={name}
      groupId={id}
      current="notebooks"
    >
      <Sheet>
        <PageHead
          title="New notebook"
          kicker={`${name}, notebooks`}
          abstract="A notebook holds one inference: a measurement, a template, priors, chains and the posterior, with the record of who set what and when."
        />
        <SheetRow>
          {measurements.length ? (
            <CreateNotebookForm
              groupId={id}
              measurements={measurements}
              measurementId={typeof wanted === 'string' ? wanted : undefined}
            />
          ) : (
            <EmptyState
              actions={
                <Button kind="primary" href={`/groups/${id}/measurements/new`}>
                  Add a measurement
                </Button>
              }
            >
              There is no measurement to open a notebook on, so the measurement comes first.
            </EmptyState>
          )}
        </SheetRow>
      </Sheet>
    </PageChrome>
  );
}
