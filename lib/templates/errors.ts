/** What can be wrong with a template, its options, its axis or a parameter value. */
export type TemplateErrorCode =
  | 'unknown_template'
  | 'unknown_option'
  | 'invalid_option'
  | 'invalid_axis'
  | 'invalid_mass'
  | 'invalid_angles'
  | 'invalid_weights';

/**
 * A fault in what a template was given. `path` names the place in the caller's terms (`options.fields`,
 * `axis.lo[3]`, `mu`), `message` says what is wrong there and what would be accepted.
 */
export class TemplateError extends Error {
  readonly code: TemplateErrorCode;
  readonly path: string;

  constructor(code: TemplateErrorCode, path: string, message: string) {
    super(message);
    this.name = 'TemplateError';
    this.code = code;
    this.path = path;
  }
}

/** Shows an offending value in a message, shortened so that a message stays one line. */
export function quoteValue(value: unknown): string {
  const text = typeof value === 'number' || value === undefined ? String(value) : JSON.stringify(value);
  const shown = text ?? typeof value;
  return shown.length > 60 ? `${shown.slice(0, 57)}…` : shown;
}
