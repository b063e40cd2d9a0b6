import { errorCodes, type ErrorBody, type ErrorCode, type ErrorDetail } from '@/lib/schemas';

/** One table: what each code answers over HTTP, and whether the asking person or we are at fault. */
const table: Record<ErrorCode, { status: number; blame: 'theirs' | 'ours' }> = {
  bad_request: { status: 400, blame: 'theirs' },
  unauthenticated: { status: 401, blame: 'theirs' },
  forbidden: { status: 403, blame: 'theirs' },
  not_found: { status: 404, blame: 'theirs' },
  conflict: { status: 409, blame: 'theirs' },
  stale_revision: { status: 409, blame: 'theirs' },
  plan_missing: { status: 409, blame: 'theirs' },
  blind: { status: 409, blame: 'theirs' },
  too_large: { status: 413, blame: 'theirs' },
  unsupported_media_type: { status: 415, blame: 'theirs' },
  invalid: { status: 422, blame: 'theirs' },
  too_many_requests: { status: 429, blame: 'theirs' },
  unavailable: { status: 503, blame: 'ours' },
  internal: { status: 500, blame: 'ours' },
};

/** The one error that crosses our borders. Its message is written for the person who asked. */
export class AppError extends Error {
  override readonly name = 'AppError';

  constructor(
    readonly code: ErrorCode,
    message: string,
    readonly details: readonly ErrorDetail[] = [],
    options?: ErrorOptions,
  ) {
    super(message, options);
  }

  get status(): number {
    return table[this.code].status;
  }

  get blame(): 'theirs' | 'ours' {
    return table[this.code].blame;
  }

  toBody(): ErrorBody {
    return { error: { code: this.code, message: this.message, details: [...this.details] } };
  }
}

/** Foreign and missing alike: the answer never tells which. */
export const notFound = (thing: string): AppError =>
  new AppError('not_found', `There is no such ${thing}, or you have no access to it.`);

export const errorStatuses: readonly number[] = [
  ...new Set(errorCodes.map((code) => table[code].status)),
].sort((a, b) => a - b);
