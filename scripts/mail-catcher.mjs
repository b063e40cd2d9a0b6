import { mkdirSync } from 'node:fs';
import { rename, writeFile } from 'node:fs/promises';
import path from 'node:path';
import { SMTPServer } from 'smtp-server';

/** Takes every mail and keeps it as a file, named so that names sort by arrival: MAIL_PORT, MAIL_DIR. */
const port = Number(process.env.MAIL_PORT);
const folder = process.env.MAIL_DIR;
if (!Number.isInteger(port) || port < 1 || !folder) {
  console.error('MAIL_PORT and MAIL_DIR have to be set.');
  process.exit(1);
}
mkdirSync(folder, { recursive: true, mode: 0o700 });

const largest = 1024 * 1024;
let count = 0;

/** Readers see a whole message or none: it is written beside and then renamed. */
async function keep(bytes) {
  count += 1;
  const name = `${Date.now()}-${String(process.pid).padStart(7, '0')}-${String(count).padStart(6, '0')}`;
  const place = path.join(folder, `${name}.eml`);
  await writeFile(`${place}.part`, bytes, { mode: 0o600 });
  await rename(`${place}.part`, place);
}

const server = new SMTPServer({
  authOptional: true,
  disabledCommands: ['STARTTLS', 'AUTH'],
  disableReverseLookup: true,
  size: largest,
  onData(stream, session, done) {
    const chunks = [];
    stream.on('data', (chunk) => chunks.push(chunk));
    stream.on('end', () => {
      if (stream.sizeExceeded) {
        done(Object.assign(new Error('The message is too large.'), { responseCode: 552 }));
        return;
      }
      keep(Buffer.concat(chunks)).then(() => done(), done);
    });
  },
});
server.on('error', (error) => {
  console.error(error.message);
  if (error.code === 'EADDRINUSE') process.exit(1);
});
server.listen(port, '127.0.0.1');

for (const signal of ['SIGINT', 'SIGTERM']) {
  process.on(signal, () => {
    server.close(() => process.exit(0));
    setTimeout(() => process.exit(0), 1000).unref();
  });
}
