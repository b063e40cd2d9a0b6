import { mkdirSync } from 'node:fs';
import S3rver from 's3rver';

/** The local object store, on loopback: S3_PORT, S3_DIR, S3_BUCKET. */
const port = Number(process.env.S3_PORT);
const { S3_DIR: directory, S3_BUCKET: bucket } = process.env;
if (!Number.isInteger(port) || port < 1 || !directory || !bucket) {
  console.error('S3_PORT, S3_DIR and S3_BUCKET have to be set.');
  process.exit(1);
}
mkdirSync(directory, { recursive: true, mode: 0o700 });

const store = new S3rver({
  port,
  address: '127.0.0.1',
  silent: true,
  directory,
  configureBuckets: [{ name: bucket, configs: [] }],
});
store.run().catch((error) => {
  console.error(error.message);
  process.exit(1);
});

for (const signal of ['SIGINT', 'SIGTERM']) {
  process.on(signal, () => {
    store.close(() => process.exit(0));
    setTimeout(() => process.exit(0), 1000).unref();
  });
}
