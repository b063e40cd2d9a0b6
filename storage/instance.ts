import { config } from '@/lib/config';
import { openStorage, type Storage } from './client';

let open: Storage | undefined;

/** The object store of this process. */
export function storage(): Storage {
  return (open ??= openStorage(config().storage));
}

export function closeStorage(): void {
  open?.close();
  open = undefined;
}
