import Link from 'next/link';
import { shortName } from '@/components/words/people';

/** Who is signed in, which leads to their account, and the way out: a plain form, so that it works while scripts load. */
export function SignOut({ email, role }: { email: string; role?: string }) {
  return (
    <form method="post" action="/api/auth/signout" className="inline-flex items-baseline gap-2">
      <input type="hidden" name="callbackUrl" value="/sign-in" />
      <span>
        <Link
          href="/account"
          className="text-ink-2 underline decoration-hairline underline-offset-[3px] hover:text-ink hover:decoration-current"
        >
          <span className="sr-only">Your account, </span>
          <span className="max-tablet:hidden">{email}</span>
          <span className="tablet:hidden">{shortName(email)}</span>
        </Link>
        {role ? <span className="max-tablet:hidden">, {role}</span> : null}
      </span>
      <button type="submit" className="text-action underline decoration-1 underline-offset-[3px]">
        Sign out
      </button>
    </form>
  );
}
