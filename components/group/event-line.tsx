import Link from 'next/link';
import type { LogEvent } from '@/lib/schemas';
import { eventPlace, eventSentence } from './log-words';

/** What somebody did, with a link to what they did it to. */
export function EventLine({ event }: { event: LogEvent }) {
  const { before, subject, after } = eventSentence(event);
  const place = eventPlace(event);
  return (
    <>
      {before}
      {subject && place ? <Link href={place}>{subject}</Link> : subject}
      {after}
    </>
  );
}
