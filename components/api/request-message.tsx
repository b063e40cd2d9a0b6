import { Message } from '@/components/ui/message';
import { detailsElsewhere, type RequestError } from './request';

/** Says why a request was refused; `shown` are the paths that stand at their own fields already. */
export function RequestMessage({
  error,
  title,
  shown = [],
}: {
  error: RequestError | null;
  title: string;
  shown?: readonly string[];
}) {
  if (!error) return null;
  const elsewhere = detailsElsewhere(error, shown);
  const atFields = error.details.length > 0 && elsewhere.length === 0;
  const rest = elsewhere.filter((detail) => detail.message !== error.message);
  return (
    <Message level="error" title={title}>
      <p>{atFields ? 'What has to be mended stands at its field.' : error.message}</p>
      {rest.map((detail, i) => (
        <p key={i}>
          {detail.line === undefined ? '' : `Line ${detail.line}: `}
          {detail.message}
        </p>
      ))}
    </Message>
  );
}
