import { describe, expect, it } from 'vitest';
import { createLogger, pathOf } from '@/lib/log';

const lineOf = (value: object): string => {
  let written = '';
  createLogger('info', { write: (text) => void (written += text) }).info(value, 'said');
  return written;
};

describe('the log', () => {
  it('hides tokens, cookies and links, up to three levels deep', () => {
    const secret = 'bn_abcdef';
    const headers = { authorization: `Bearer ${secret}`, cookie: secret, 'set-cookie': secret };
    const line = lineOf({ token: secret, link: secret, request: { headers }, mail: { url: secret } });
    expect(line).not.toContain(secret);
    expect(line).toContain('[hidden]');
    expect(line).toContain('said');
  });

  it('keeps what is not secret', () => {
    expect(lineOf({ path: '/api/v1/me', status: 200 })).toContain('"path":"/api/v1/me","status":200');
  });

  it('writes a path without its query', () => {
    expect(pathOf('/sign-in/confirm?token=abc')).toBe('/sign-in/confirm');
    expect(pathOf('/me')).toBe('/me');
  });
});
