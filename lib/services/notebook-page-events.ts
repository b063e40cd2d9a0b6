import { Fit } from '@/models';
import { notFound } from '@/lib/errors';
import { authorise, type Access } from './access';
import { watchFit } from './fit-events';
import { watchNotebook } from './notebook-events';

/** Where the events of a page go: named, each a whole state. */
export interface PageSink {
  send(event: 'notebook' | 'presence' | 'fit' | 'trouble', data: unknown): void;
  end(): void;
}

/**
 * All that changes on the page of a notebook, over one stream: the notebook, who else has it open, and one of its fits until
 * that ends. `not_found` for a fit of another notebook.
 */
export async function watchNotebookPage(
  access: Access,
  fitId: string | null,
  sink: PageSink,
): Promise<() => void> {
  const fit = fitId === null ? null : await authorise(access.actor, 'fit', fitId, 'fit.read');
  if (fit && (await Fit.count({ where: { id: fit.id, notebookId: access.id } })) === 0) throw notFound('fit');
  const stops: (() => void)[] = [];
  const stop = () => stops.forEach((each) => each());
  stops.push(
    await watchNotebook(access, {
      onNotebook: (notebook) => sink.send('notebook', notebook),
      onPresence: (presence) => sink.send('presence', presence),
      onEnd: () => sink.end(),
    }),
  );
  if (fit) {
    try {
      stops.push(
        await watchFit(fit, {
          onEvent: (event) => sink.send('fit', event),
          onTrouble: (message) => sink.send('trouble', { message }),
          onEnd: () => undefined,
        }),
      );
    } catch (error) {
      stop();
      throw error;
    }
  }
  return stop;
}
