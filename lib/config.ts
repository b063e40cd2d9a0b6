import { z } from 'zod';

/** Environment variables that are set to nothing count as not set. */
const text = z.string().min(1);
const port = z.coerce.number<string>().int().min(1).max(65535);
const address = (...protocols: string[]) =>
  text.refine((value) => URL.canParse(value) && protocols.includes(new URL(value).protocol), {
    message: `must be an address that begins with ${protocols.map((protocol) => `${protocol}//`).join(' or ')}`,
  });

const environmentSchema = z.object({
  PORT: port.default(3000),
  HOST: text.default('127.0.0.1'),
  BEATNOTE_URL: address('http:', 'https:'),
  BEATNOTE_STATE: text.default('.state'),
  DATABASE_URL: address('mariadb:', 'mysql:'),
  REDIS_URL: address('redis:', 'rediss:'),
  S3_ENDPOINT: address('http:', 'https:'),
  S3_BUCKET: text,
  S3_ACCESS_KEY_ID: text,
  S3_SECRET_ACCESS_KEY: text,
  SMTP_URL: address('smtp:', 'smtps:'),
  MAIL_FROM: text.default('Beatnote <beatnote@localhost>'),
  AUTH_SECRET: z.string().min(32, { message: 'must have at least 32 characters' }),
  BEATNOTE_MAIL_DIR: text.optional(),
  BEATNOTE_GROUP_FITS: z.coerce.number<string>().int().min(1).max(64).default(2),
  LOG_LEVEL: z.enum(['debug', 'info', 'warn', 'error', 'silent']).default('info'),
});

export interface Config {
  port: number;
  host: string;
  /** Origin of the pages, without a slash at the end. */
  url: string;
  secure: boolean;
  stateFolder: string;
  databaseUrl: string;
  redisUrl: string;
  storage: { endpoint: string; bucket: string; accessKeyId: string; secretAccessKey: string };
  smtpUrl: string;
  mailFrom: string;
  authSecret: string;
  /** Folder of the local mail catcher; null where mail leaves the machine or the pages are served beyond it. */
  mailFolder: string | null;
  /** Fits that a group may run at once where nobody has set another limit. */
  groupFits: number;
  logLevel: 'debug' | 'info' | 'warn' | 'error' | 'silent';
}

const loopback = (host: string) => host === '::1' || host === 'localhost' || /^127(\.\d{1,3}){3}$/.test(host);

/** Reads a configuration, or throws one error that lists every fault. */
export function readConfig(environment: Record<string, string | undefined>): Config {
  const given = Object.fromEntries(Object.entries(environment).filter(([, value]) => value !== ''));
  const parsed = environmentSchema.safeParse(given);
  if (!parsed.success) {
    const faults = parsed.error.issues.map((issue) => {
      const name = issue.path.join('.');
      return `  ${name}: ${given[name] === undefined ? 'is not set' : issue.message}`;
    });
    throw new Error(`The configuration has faults:\n${faults.join('\n')}`);
  }
  const env = parsed.data;
  const url = new URL(env.BEATNOTE_URL);
  return {
    port: env.PORT,
    host: env.HOST,
    url: url.origin,
    secure: url.protocol === 'https:',
    stateFolder: env.BEATNOTE_STATE,
    databaseUrl: env.DATABASE_URL,
    redisUrl: env.REDIS_URL,
    storage: {
      endpoint: env.S3_ENDPOINT,
      bucket: env.S3_BUCKET,
      accessKeyId: env.S3_ACCESS_KEY_ID,
      secretAccessKey: env.S3_SECRET_ACCESS_KEY,
    },
    smtpUrl: env.SMTP_URL,
    mailFrom: env.MAIL_FROM,
    authSecret: env.AUTH_SECRET,
    mailFolder: env.BEATNOTE_MAIL_DIR !== undefined && loopback(env.HOST) ? env.BEATNOTE_MAIL_DIR : null,
    groupFits: env.BEATNOTE_GROUP_FITS,
    logLevel: env.LOG_LEVEL,
  };
}

let known: Config | undefined;

/** The configuration of this process, read at the first call and never while modules load: a build has no environment. */
export function config(): Config {
  known ??= readConfig(process.env);
  return known;
}
