'use client';

import useSWR from 'swr';
import { read } from '@/components/api/request';
import type { Measurement } from '@/lib/schemas';

/** One version of a measurement: `given` where it is that one, else read; until then `given` stands in. */
export function useVersion(given: Measurement, version: number): Measurement {
  const { data = given } = useSWR(`/api/v1/measurements/${given.id}?version=${version}`, read<Measurement>, {
    fallbackData: given.version === version ? given : undefined,
    revalidateOnMount: given.version !== version,
    revalidateOnFocus: false,
    keepPreviousData: true,
  });
  return data;
}
