import { ConnectionError } from 'sequelize';
import { AppError } from '@/lib/errors';
import { log } from '@/lib/log';

const privately = { 'Cache-Control': 'private, no-store', 'X-Content-Type-Options': 'nosniff' };

export const json = (value: unknown, status = 200): Response =>
  Response.json(value, { status, headers: privately });

/** The driver calls it fatal when the connection broke while a statement was under way. */
const connectionBroke = (error: unknown): boolean =>
  error instanceof ConnectionError ||
  (error instanceof Error &&
    'parent' in error &&
    typeof error.parent === 'object' &&
    error.parent !== null &&
    'fatal' in error.parent &&
    error.parent.fatal === true);

/** The one translator of errors at the edge: ours are logged and hidden, theirs are told. */
export function translate(error: unknown, requestId: string): AppError {
  if (error instanceof AppError) {
    if (error.blame === 'ours') log.error({ err: error, requestId }, error.message);
    return error;
  }
  if (connectionBroke(error)) {
    log.error({ err: error, requestId }, 'the database is away');
    return new AppError(
      'unavailable',
      'The database is away for a moment. Nothing was lost; try again shortly.',
    );
  }
  log.error({ err: error, requestId }, 'unexpected error');
  return new AppError('internal', `Something went wrong on our side. It is logged under ${requestId}.`);
}

export function errorAnswer(error: AppError): Response {
  return json(error.toBody(), error.status);
}
