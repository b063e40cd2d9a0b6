import pino, { type Logger } from 'pino';

/** Whoever holds one of these can act as somebody else, so none may reach a log. */
const secrets = [
  'token',
  'authorization',
  'cookie',
  'set-cookie',
  'password',
  'secret',
  'link',
  'url',
  'callbackUrl',
  'sessionToken',
];

const quote = (name: string) => (name.includes('-') ? `["${name}"]` : name);
const paths = secrets.flatMap((name) =>
  name.includes('-')
    ? [quote(name), `*${quote(name)}`, `*.*${quote(name)}`]
    : [name, `*.${name}`, `*.*.${name}`],
);

/** A logger that writes JSON lines and hides tokens, cookies and sign-in links up to three levels deep. */
export const createLogger = (level: string, destination?: pino.DestinationStream): Logger =>
  pino(
    {
      level,
      base: { pid: process.pid },
      timestamp: pino.stdTimeFunctions.isoTime,
      redact: { paths, censor: '[hidden]' },
    },
    destination ?? pino.destination({ dest: 1, sync: true }),
  );

/** The logger of this process. Its level is read here, not through the configuration, so that a faulty one can be told. */
export const log: Logger = createLogger(process.env.LOG_LEVEL || 'info');

/** A path with what may be secret in its query left out. */
export const pathOf = (address: string): string => {
  const at = address.indexOf('?');
  return at < 0 ? address : address.slice(0, at);
};
