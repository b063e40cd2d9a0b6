import { Button, Buttons } from '@/components/ui/button';

/** Uses a mailed link up. A program that only looks at links in mails presses no button. */
export function ConfirmForm({
  token,
  email,
  callbackUrl,
}: {
  token: string;
  email: string;
  callbackUrl: string;
}) {
  return (
    <form method="post" action="/api/auth/callback/nodemailer">
      <input type="hidden" name="token" value={token} />
      <input type="hidden" name="email" value={email} />
      <input type="hidden" name="callbackUrl" value={callbackUrl} />
      <Buttons>
        <Button kind="primary" type="submit">
          Sign in
        </Button>
      </Buttons>
    </form>
  );
}
