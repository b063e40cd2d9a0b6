import type { Metadata } from 'next';
import { LinkUnusable } from '../_components/link-unusable';

export const metadata: Metadata = { title: 'Link not usable' };

export default function SignInErrorPage() {
  return <LinkUnusable />;
}
