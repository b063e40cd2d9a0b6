import { AppError } from '@/lib/errors';
import { InferenceError } from '@/lib/inference';
import { MeasurementError } from '@/lib/measurements';
import type { ErrorDetail } from '@/lib/schemas';
import { TemplateError } from '@/lib/templates';

/** What a fault in the pure core means in the terms of a notebook: the field of the body that has to change. */
export function faultOf(error: unknown): ErrorDetail | null {
  if (error instanceof TemplateError) {
    return { path: templatePath(error.path), message: `${capital(error.message)}.` };
  }
  if (error instanceof InferenceError) {
    return { path: inferencePath(error), message: `${capital(error.message)}: ${error.remedy}.` };
  }
  if (error instanceof MeasurementError) {
    return { path: 'cuts', message: `${error.message} ${error.remedy}` };
  }
  return null;
}

/** Runs a step of the pure core; its faults become `invalid` with the place and the remedy, others pass through. */
export function refusingFaults<T>(step: () => T): T {
  try {
    return step();
  } catch (error) {
    const detail = faultOf(error);
    if (detail === null) throw error;
    throw new AppError('invalid', detail.message, [detail], { cause: error });
  }
}

function templatePath(path: string): string {
  if (path.startsWith('options')) return `template.${path}`;
  return path.startsWith('axis') ? 'measurement' : path;
}

function inferencePath({ code, path }: InferenceError): string {
  if (code === 'mock_count_missing' || code === 'too_few_mocks') return 'likelihood.kind';
  return path.startsWith('data') ? 'measurement' : path;
}

const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);
