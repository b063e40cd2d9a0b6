import { describe, expect, it } from 'vitest';
import { AppError, errorStatuses, notFound } from '@/lib/errors';
import { errorBodySchema, errorCodes, type ErrorCode } from '@/lib/schemas';

describe('errors', () => {
  it('answer the status that the interface promises for each code', () => {
    const promised: Record<ErrorCode, number> = {
      bad_request: 400,
      unauthenticated: 401,
      forbidden: 403,
      not_found: 404,
      conflict: 409,
      stale_revision: 409,
      plan_missing: 409,
      blind: 409,
      too_large: 413,
      unsupported_media_type: 415,
      invalid: 422,
      too_many_requests: 429,
      unavailable: 503,
      internal: 500,
    };
    for (const code of errorCodes)
      expect([code, new AppError(code, '').status]).toEqual([code, promised[code]]);
    expect(errorStatuses).toEqual([400, 401, 403, 404, 409, 413, 415, 422, 429, 500, 503]);
  });

  it('say whose fault they are', () => {
    const ours = errorCodes.filter((code) => new AppError(code, '').blame === 'ours');
    expect(ours).toEqual(['unavailable', 'internal']);
  });

  it('have a body of code, message and details', () => {
    const details = [{ path: 'priors.mu1', message: 'lo must be below hi' }];
    const body = new AppError('invalid', 'The priors aren’t valid.', details).toBody();
    expect(errorBodySchema.parse(body)).toEqual({
      error: { code: 'invalid', message: 'The priors aren’t valid.', details },
    });
  });

  it('tell nothing of whether a thing is missing or foreign', () => {
    expect(notFound('notebook').message).toBe('There is no such notebook, or you have no access to it.');
  });
});
