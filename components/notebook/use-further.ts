'use client';

import { useMemo } from 'react';
import useSWR from 'swr';
import { read } from '@/components/api/request';
import type { Measurement } from '@/lib/schemas';

/** A version of a measurement. */
export interface VersionOf {
  id: string;
  version: number;
}

const addressOf = ({ id, version }: VersionOf): string => `/api/v1/measurements/${id}?version=${version}`;

/** Further measurements in these versions: those that are `given`, the others read; null until all are there. */
export function useFurther(
  given: readonly Measurement[],
  wanted: readonly VersionOf[],
): readonly Measurement[] | null {
  const missing = wanted.filter(
    (each) => !given.some(({ id, version }) => id === each.id && version === each.version),
  );
  const { data } = useSWR(
    missing.length > 0 ? missing.map(addressOf) : null,
    (addresses: string[]) => Promise.all(addresses.map((address) => read<Measurement>(address))),
    { revalidateOnFocus: false, keepPreviousData: true },
  );
  const key = JSON.stringify(wanted.map(({ id, version }) => ({ id, version })));
  return useMemo(() => {
    const all = [...given, ...(data ?? [])];
    const found = (JSON.parse(key) as VersionOf[]).map((each) =>
      all.find(({ id, version }) => id === each.id && version === each.version),
    );
    return found.every((each) => each !== undefined) ? found : null;
  }, [given, data, key]);
}
