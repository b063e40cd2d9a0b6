import type { Metadata } from 'next';
import { LinkUnusable } from '../_components/link-unusable';
import { ShutOut } from '../_components/shut-out';

export const metadata: Metadata = { title: 'Link not usable' };

export default async function SignInErrorPage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}) {
  return (await searchParams).error === 'AccessDenied' ? <ShutOut /> : <LinkUnusable />;
}
