import { Button, Buttons } from '@/components/ui/button';
import { Field } from '@/components/ui/field';

/** Asks for an address; a plain form, which needs no script. */
export function SignInForm({
  callbackUrl,
  lifetime,
  email,
  error,
}: {
  callbackUrl: string;
  /** How long a link can be used, in words. */
  lifetime: string;
  email?: string;
  error?: string;
}) {
  return (
    <form method="post" action="/api/auth/signin/nodemailer" className="border-t border-ink pt-2">
      <input type="hidden" name="callbackUrl" value={callbackUrl} />
      <Field
        label="E-mail address"
        name="email"
        type="email"
        required
        autoComplete="email"
        defaultValue={email}
        error={error}
        help={`We mail you a link that signs you in once, ${lifetime}. There is no password.`}
      />
      <Buttons>
        <Button kind="primary" type="submit">
          Mail me a link
        </Button>
      </Buttons>
    </form>
  );
}
