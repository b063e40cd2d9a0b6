import { AppError } from '@/lib/errors';
import { fieldCount, findTemplate, type ParameterDeclaration } from '@/lib/templates';
import type { NotebookSettings } from '@/models';
import type { StoredNumbers } from './fit-model';
import { refusingFaults } from './inference-faults';
import { settleSettings } from './notebook-settings';

/** Why a template has no family of numbers of fields, as a sentence; null where it has. */
export function withoutFamily({ template }: NotebookSettings): string | null {
  return fieldCount(template.options.fields) > 0
    ? null
    : 'The template has no fields: choose one with fields in section 2 to compare their number.';
}

/** Fields as an option says them, with `count` of them: the first ones of a list, and its last kind again. */
function resized(fields: unknown, count: number): unknown {
  if (!Array.isArray(fields)) return count;
  const kinds: unknown[] = fields;
  return Array.from({ length: count }, (_, i) => kinds[Math.min(i, kinds.length - 1)]);
}

/**
 * Priors by name for what a further field adds: those of the same parameter of the last field that there is, since fields are
 * told apart by their order alone. Mixing angles, which belong to no field, get the template's own.
 */
function priorsOfMore(
  parameters: readonly ParameterDeclaration[],
  before: readonly ParameterDeclaration[],
  priors: NotebookSettings['priors'],
): NotebookSettings['priors'] {
  const known = new Set(before.map(({ name }) => name));
  const base = (name: string) => name.replace(/\d+$/, '');
  return Object.fromEntries(
    parameters.flatMap(({ name, role, field }) => {
      if (known.has(name) || field === null) return [];
      const like = before.findLast(
        (each) => each.role === role && each.field !== null && base(each.name) === base(name),
      );
      return like ? [[name, priors[like.name]]] : [];
    }),
  );
}

/**
 * The settings with `count` fields on the same version, everything else as it is: cuts, likelihood, background, averaging and
 * priors; without any field the smooth background alone. `invalid` where they can't be fitted.
 */
export function withFieldCount(
  numbers: StoredNumbers,
  settings: NotebookSettings,
  count: number,
  measured: { blind: boolean },
): NotebookSettings {
  const { cuts, likelihood, template, priors, also, sharedMocks } = settings;
  const refusal = withoutFamily(settings);
  if (refusal !== null)
    throw new AppError('invalid', refusal, [{ path: 'template.options.fields', message: refusal }]);
  if (count === fieldCount(template.options.fields)) return settings;
  const { background, binAverage, binWeight, fields } = template.options;
  const changed =
    count === 0
      ? { id: 'background', options: { background, binAverage, binWeight } }
      : { id: template.id, options: { ...template.options, fields: resized(fields, count) } };
  const given = refusingFaults(() =>
    priorsOfMore(
      findTemplate(changed.id).parameters(changed.options),
      findTemplate(template.id).parameters(template.options),
      priors,
    ),
  );
  return settleSettings(
    numbers,
    { cuts, likelihood, template: changed, given: {}, kept: { ...priors, ...given }, also, sharedMocks },
    measured,
  );
}
