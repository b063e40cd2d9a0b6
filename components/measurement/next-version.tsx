import { capital, counted } from '@/components/words/counts';

/** The measurement of which a newer version is being stored. */
export interface NextOf {
  id: string;
  name: string;
  newest: number;
  simulated: boolean;
  /** How many notebooks rest on it. */
  notebooks: number;
}

/** What storing a newer version does to those who use the older ones. */
export function NextVersion({ onto: { name, newest, notebooks } }: { onto: NextOf }) {
  const one = notebooks === 1;
  return (
    <p>
      It becomes version {newest + 1} of {name}; version {newest} stays.{' '}
      {notebooks
        ? `${capital(counted(notebooks, 'notebook'))} ${one ? 'rests' : 'rest'} on an older version and ${one ? 'stays' : 'stay'} there until somebody takes the newer one up.`
        : 'No notebook rests on it yet.'}
    </p>
  );
}
