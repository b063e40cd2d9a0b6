import type { NextConfig } from 'next';
import { fileURLToPath } from 'node:url';

/** These load drivers, workers or native pieces by name at run time, which a bundler can't follow. */
const nodePackages = [
  'sequelize',
  'mariadb',
  'umzug',
  'bullmq',
  'ioredis',
  'pino',
  'nodemailer',
  '@aws-sdk/client-s3',
  'busboy',
  'mailparser',
];

const config: NextConfig = {
  poweredByHeader: false,
  serverExternalPackages: nodePackages,
  turbopack: { root: fileURLToPath(new URL('.', import.meta.url)) },
};

export default config;
