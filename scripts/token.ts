import { parseArgs } from 'node:util';
import { AppError } from '@/lib/errors';
import { closeDatabase } from '@/lib/db';
import { createToken } from '@/lib/services/tokens';
import { takeInstanceEnvironment } from './instance-environment';

/**
 * `npm run token -- --email E [--name N]`: prints one API token of the running instance, and nothing else. What the
 * environment doesn't say is taken from the instance that runs in BEATNOTE_STATE.
 */

function fail(message: string): never {
  process.stderr.write(`${message}\n`);
  process.exit(1);
}

function readArguments(): { email: string; name: string } {
  const usage = 'Say whose token: npm run token -- --email E [--name N]';
  try {
    const { values } = parseArgs({ options: { email: { type: 'string' }, name: { type: 'string' } } });
    if (!values.email) fail(usage);
    return { email: values.email, name: values.name ?? 'command line' };
  } catch {
    return fail(usage);
  }
}

const { email, name } = readArguments();
takeInstanceEnvironment();
if (!process.env.DATABASE_URL) fail('No instance runs in BEATNOTE_STATE, and DATABASE_URL is not set.');
try {
  process.stdout.write(`${await createToken(email, name)}\n`);
} catch (error) {
  fail(error instanceof AppError ? error.message : `The token could not be made: ${String(error)}`);
} finally {
  await closeDatabase();
}
