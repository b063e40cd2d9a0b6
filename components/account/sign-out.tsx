import { shortName } from '@/components/words/people';

/** Who is signed in, and the way out: a plain form, so that it works while scripts load. */
export function SignOut({ email, role }: { email: string; role?: string }) {
  return (
    <form method="post" action="/api/auth/signout" className="inline-flex items-baseline gap-2">
      <input type="hidden" name="callbackUrl" value="/sign-in" />
      <span className="max-tablet:hidden">{role ? `${email}, ${role}` : email}</span>
      <span className="tablet:hidden">{shortName(email)}</span>
      <button type="submit" className="text-action underline decoration-1 underline-offset-[3px]">
        Sign out
      </button>
    </form>
  );
}
