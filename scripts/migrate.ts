import { migrator } from '@/migrations';
import { openDatabase } from '@/models';

/** Brings the tables up to date; `--down` takes the last step back. */
const url = process.env.DATABASE_URL;
if (!url) {
  process.stderr.write('DATABASE_URL is not set: say which database to bring up to date.\n');
  process.exit(1);
}
const database = openDatabase(url, { poolMax: 1 });
try {
  const migrations = migrator(database);
  const done = process.argv.includes('--down') ? await migrations.down() : await migrations.up();
  process.stdout.write(`${done.length} step${done.length === 1 ? '' : 's'}\n`);
} finally {
  await database.close();
}
