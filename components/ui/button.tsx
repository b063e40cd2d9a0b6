import { useId, type MouseEventHandler, type ReactNode } from 'react';
import Link from 'next/link';

export interface ButtonProps {
  kind?: 'default' | 'primary';
  /** Makes it a link that looks like a button. */
  href?: string;
  /** For a link to a file. */
  download?: boolean | string;
  /** Given: the button is disabled, and these words stand beside it. */
  reason?: ReactNode;
  /** Given: what it was pressed for is under way. It keeps its place and the focus, shows these words and does nothing. */
  busy?: ReactNode;
  type?: 'button' | 'submit';
  onClick?: MouseEventHandler<HTMLElement>;
  name?: string;
  value?: string;
  'aria-expanded'?: boolean;
  'aria-controls'?: string;
  children: ReactNode;
}

const shape =
  'inline-flex min-h-[35px] items-center rounded border px-[15px] py-[6px] font-controls text-control no-underline max-tablet:min-h-[44px]';
const looks = {
  default: 'border-rule text-ink hover:border-ink',
  primary: 'border-action bg-action text-on-action hover:border-action-strong hover:bg-action-strong',
  disabled: 'cursor-not-allowed border-dashed border-rule text-ink-3',
};

/** A disabled button stays reachable by keyboard, so that its reason can be heard; it only does nothing. */
export function Button({
  kind = 'default',
  href,
  download,
  reason,
  busy,
  type = 'button',
  onClick,
  children,
  ...rest
}: ButtonProps) {
  const reasonId = useId();
  if (reason)
    return (
      <>
        <button
          type="button"
          aria-disabled="true"
          aria-describedby={reasonId}
          className={`${shape} ${looks.disabled}`}
        >
          {children}
        </button>
        <span id={reasonId} className="font-controls text-note text-ink-2">
          {reason}
        </span>
      </>
    );
  const className = `${shape} ${looks[kind]}`;
  if (href && download !== undefined)
    return (
      <a href={href} download={download} className={className} onClick={onClick}>
        {children}
      </a>
    );
  if (href)
    return (
      <Link href={href} className={className} onClick={onClick}>
        {children}
      </Link>
    );
  return (
    <button
      type={busy ? 'button' : type}
      aria-disabled={busy ? true : undefined}
      className={busy ? `${shape} ${looks.disabled}` : className}
      onClick={busy ? undefined : onClick}
      {...rest}
    >
      {busy ?? children}
    </button>
  );
}

/** A row of buttons, with a remark after them. */
export function Buttons({ note, children }: { note?: ReactNode; children: ReactNode }) {
  return (
    <div className="no-print my-2 flex flex-wrap items-center gap-2">
      {children}
      {note ? <span className="font-controls text-note text-ink-2">{note}</span> : null}
    </div>
  );
}
