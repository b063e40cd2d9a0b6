import {
  useId,
  type InputHTMLAttributes,
  type ReactNode,
  type Ref,
  type SelectHTMLAttributes,
  type TextareaHTMLAttributes,
} from 'react';
import { StateWord } from './state-word';

interface Around {
  label?: ReactNode;
  /** Name for assistive technology where a table's head already says it. */
  hiddenLabel?: string;
  help?: ReactNode;
  /** The remedy; the line turns to the colour of an error and the help gives way. */
  error?: ReactNode;
  /** The fault is told elsewhere in the same row: only the line shows it here. */
  invalid?: boolean;
}

/** Classes of a control with a line below only. */
export const lineLook =
  'w-full rounded-none border-b border-rule bg-transparent pt-[6px] pb-[6px] text-ink hover:border-ink aria-[invalid=true]:border-b-2 aria-[invalid=true]:border-bad aria-[invalid=true]:pb-[5px] max-tablet:min-h-[44px]';
const wordsLook = `${lineLook} font-words text-[16px]/[21px]`;

export interface Described {
  id: string;
  'aria-label'?: string;
  'aria-describedby'?: string;
  'aria-invalid'?: boolean;
}

/** Label above, control, help or error below; the control gets the ids that tie them together. */
export function Labelled({
  label,
  hiddenLabel,
  help,
  error,
  invalid,
  id,
  children,
}: Around & { id?: string; children: (described: Described) => ReactNode }) {
  const own = useId();
  const controlId = id ?? own;
  const belowId = `${controlId}-below`;
  return (
    <div className="min-w-0">
      {label ? (
        <label htmlFor={controlId} className="block font-controls text-control text-ink">
          {label}
        </label>
      ) : null}
      {children({
        id: controlId,
        'aria-label': hiddenLabel,
        'aria-describedby': help || error ? belowId : undefined,
        'aria-invalid': error || invalid ? true : undefined,
      })}
      {error ? (
        <p id={belowId} className="mt-[3px] mb-0 font-controls text-note text-ink-2">
          <span className="mr-1">
            <StateWord kind="bad">Error</StateWord>
          </span>
          {error}
        </p>
      ) : help ? (
        <p id={belowId} className="mt-[3px] mb-0 font-controls text-note text-ink-2">
          {help}
        </p>
      ) : null}
    </div>
  );
}

export type FieldProps = Around & InputHTMLAttributes<HTMLInputElement>;

export function Field({ label, hiddenLabel, help, error, id, ...input }: FieldProps) {
  return (
    <Labelled label={label} hiddenLabel={hiddenLabel} help={help} error={error} id={id}>
      {(described) => <input type="text" {...input} {...described} className={wordsLook} />}
    </Labelled>
  );
}

export type TextFieldProps = Around &
  TextareaHTMLAttributes<HTMLTextAreaElement> & { ref?: Ref<HTMLTextAreaElement> };

export function TextField({ label, hiddenLabel, help, error, id, ...area }: TextFieldProps) {
  return (
    <Labelled label={label} hiddenLabel={hiddenLabel} help={help} error={error} id={id}>
      {(described) => <textarea rows={3} {...area} {...described} className={wordsLook} />}
    </Labelled>
  );
}

export type SelectFieldProps = Around &
  SelectHTMLAttributes<HTMLSelectElement> & {
    options: { value: string; label: string; disabled?: boolean }[];
  };

export function SelectField({ label, hiddenLabel, help, error, id, options, ...select }: SelectFieldProps) {
  return (
    <Labelled label={label} hiddenLabel={hiddenLabel} help={help} error={error} id={id}>
      {(described) => (
        <select {...select} {...described} className={wordsLook}>
          {options.map((option) => (
            <option key={option.value} value={option.value} disabled={option.disabled}>
              {option.label}
            </option>
          ))}
        </select>
      )}
    </Labelled>
  );
}

export type CheckFieldProps = { label: ReactNode; help?: ReactNode } & InputHTMLAttributes<HTMLInputElement>;

/** A yes or no, in the browser's own box with the action colour. */
export function CheckField({ label, help, id, ...input }: CheckFieldProps) {
  const own = useId();
  const controlId = id ?? own;
  return (
    <div>
      <label
        htmlFor={controlId}
        className="flex min-h-target items-center gap-[10px] font-controls text-control text-ink"
      >
        <input
          type="checkbox"
          {...input}
          id={controlId}
          aria-describedby={help ? `${controlId}-below` : undefined}
          className="size-[15px] flex-none accent-action"
        />
        {label}
      </label>
      {help ? (
        <p id={`${controlId}-below`} className="mb-0 font-controls text-note text-ink-2">
          {help}
        </p>
      ) : null}
    </div>
  );
}

/** Two fields beside each other, one below the other on a phone. */
export function FieldPair({ children }: { children: ReactNode }) {
  return <div className="grid max-w-figure grid-cols-2 gap-4 max-tablet:grid-cols-1">{children}</div>;
}
