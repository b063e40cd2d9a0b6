import { Fragment } from 'react';

export type MailPart = { text: string } | { link: string };

/** Cuts a mail's text at the addresses in it that may be followed. */
export function mailParts(text: string, links: readonly string[]): MailPart[] {
  const parts: MailPart[] = [];
  let rest = text;
  while (rest) {
    // The earliest, and of two that begin together the longer one.
    const next = links
      .map((link) => ({ link, at: rest.indexOf(link) }))
      .filter(({ at }) => at >= 0)
      .sort((a, b) => a.at - b.at || b.link.length - a.link.length)[0];
    if (!next) break;
    if (next.at > 0) parts.push({ text: rest.slice(0, next.at) });
    parts.push({ link: next.link });
    rest = rest.slice(next.at + next.link.length);
  }
  if (rest) parts.push({ text: rest });
  return parts;
}

/** A mail as it was written; links are plain anchors, because a router that looks ahead would open them. */
export function MailText({ text, links }: { text: string; links: readonly string[] }) {
  return (
    <p className="mb-0 text-small wrap-anywhere whitespace-pre-line">
      {mailParts(text.trim(), links).map((part, i) =>
        'link' in part ? (
          <a key={i} href={part.link}>
            {part.link}
          </a>
        ) : (
          <Fragment key={i}>{part.text}</Fragment>
        ),
      )}
    </p>
  );
}
