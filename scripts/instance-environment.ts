import { existsSync, readFileSync } from 'node:fs';
import path from 'node:path';

/** What the environment doesn't say is taken from the instance that runs in BEATNOTE_STATE. */
export function takeInstanceEnvironment(): void {
  const file = path.resolve(process.env.BEATNOTE_STATE ?? '.state', 'instance.json');
  if (!existsSync(file)) return;
  const known = JSON.parse(readFileSync(file, 'utf8')) as Record<string, string>;
  for (const [name, value] of Object.entries(known)) process.env[name] ??= value;
}
