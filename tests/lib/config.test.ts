import { describe, expect, it } from 'vitest';
import { readConfig } from '@/lib/config';

const whole = {
  BEATNOTE_URL: 'http://127.0.0.1:3000/',
  DATABASE_URL: 'mariadb://u:p@127.0.0.1:3306/beatnote',
  REDIS_URL: 'redis://127.0.0.1:6379',
  S3_ENDPOINT: 'http://127.0.0.1:4568',
  S3_BUCKET: 'beatnote',
  S3_ACCESS_KEY_ID: 'S3RVER',
  S3_SECRET_ACCESS_KEY: 'S3RVER',
  SMTP_URL: 'smtp://127.0.0.1:2525',
  AUTH_SECRET: 'x'.repeat(32),
};

const faultOf = (environment: Record<string, string | undefined>): string => {
  try {
    readConfig(environment);
  } catch (error) {
    return (error as Error).message;
  }
  return 'no fault';
};

describe('the configuration', () => {
  it('has defaults for port, host and state, and our address without a slash', () => {
    expect(readConfig(whole)).toMatchObject({
      port: 3000,
      host: '127.0.0.1',
      stateFolder: '.state',
      url: 'http://127.0.0.1:3000',
      secure: false,
      mailFolder: null,
    });
  });

  it('lists all faults at once', () => {
    const message = faultOf({
      ...whole,
      PORT: '70000',
      REDIS_URL: 'http://x',
      S3_BUCKET: '',
      AUTH_SECRET: 'short',
    });
    expect(message.split('\n')).toHaveLength(5);
    expect(message).toMatch(/PORT: /);
    expect(message).toMatch(/REDIS_URL: must be an address that begins with redis:\/\/ or rediss:\/\//);
    expect(message).toMatch(/S3_BUCKET: is not set/);
    expect(message).toMatch(/AUTH_SECRET: must have at least 32 characters/);
  });

  it('never repeats a secret in a fault', () => {
    expect(faultOf({ ...whole, AUTH_SECRET: 'hunter2' })).not.toContain('hunter2');
    expect(faultOf({ ...whole, DATABASE_URL: 'u:hunter2@x' })).not.toContain('hunter2');
  });

  it('has a mailbox only with the local catcher and where the pages stay on this machine', () => {
    const caught = { ...whole, BEATNOTE_MAIL_DIR: '/state/mail' };
    expect(readConfig(caught).mailFolder).toBe('/state/mail');
    for (const HOST of ['127.0.0.2', '::1', 'localhost']) {
      expect(readConfig({ ...caught, HOST }).mailFolder).toBe('/state/mail');
    }
    for (const HOST of ['0.0.0.0', '10.0.0.5', '127.0.0.1.example.org', '::']) {
      expect(readConfig({ ...caught, HOST }).mailFolder).toBeNull();
    }
  });

  it('makes cookies secure where our address is https', () => {
    expect(readConfig({ ...whole, BEATNOTE_URL: 'https://beatnote.example' }).secure).toBe(true);
  });
});
