import { InferenceError } from '@/lib/inference/inference-error';
import { layOutParameters } from '@/lib/inference/parameter-layout';
import { validatePrior } from '@/lib/inference/priors';
import type { CompiledTemplate, Prior } from '@/lib/templates';

/** What is wrong with a set of priors: by parameter and field, and what concerns several of them. */
export interface PriorFaults {
  byField: Readonly<Record<string, Readonly<Record<string, string>>>>;
  /** In words, with the remedy; one a parameter. */
  byParameter: Readonly<Record<string, string>>;
  /** About the priors together. */
  joint: string | null;
}

const sentence = ({ message, remedy }: InferenceError) =>
  `${message.charAt(0).toUpperCase()}${message.slice(1)}: ${remedy}.`;

/** Checks priors as the server does when they are saved. */
export function findPriorFaults(
  template: CompiledTemplate,
  priors: Readonly<Record<string, Prior>>,
): PriorFaults {
  const byField: Record<string, Record<string, string>> = {};
  const byParameter: Record<string, string> = {};
  for (const declaration of template.parameters) {
    const fault = validatePrior(priors[declaration.name] ?? declaration.defaultPrior, declaration);
    if (!fault) continue;
    const field = fault.path.split('.').pop() ?? 'kind';
    byField[declaration.name] = { [field]: sentence(fault) };
    byParameter[declaration.name] = sentence(fault);
  }
  if (Object.keys(byParameter).length) return { byField, byParameter, joint: null };
  try {
    layOutParameters({ template, priors });
    return { byField, byParameter, joint: null };
  } catch (error) {
    if (error instanceof InferenceError) return { byField, byParameter, joint: sentence(error) };
    throw error;
  }
}
