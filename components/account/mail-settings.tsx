'use client';

import { useState } from 'react';
import { asRequestError, send, type RequestError } from '@/components/api/request';
import { RequestMessage } from '@/components/api/request-message';
import { CheckField } from '@/components/ui/field';
import { IndexSection } from '@/components/ui/index-list';
import type { Settings } from '@/lib/schemas';

/** Which mails a person gets; a change holds at once. */
export function MailSettings({ initial }: { initial: Settings }) {
  const [settings, setSettings] = useState(initial);
  const [error, setError] = useState<RequestError | null>(null);

  async function change(mailAboutFits: boolean) {
    const before = settings;
    setError(null);
    setSettings({ mailAboutFits });
    try {
      setSettings(await send<Settings>('PATCH', '/api/v1/me/settings', { mailAboutFits }));
    } catch (thrown) {
      setSettings(before);
      setError(asRequestError(thrown));
    }
  }

  return (
    <IndexSection id="mail" title="Mail">
      <div className="border-t border-ink pt-2">
        <CheckField
          label="Mail me when a fit that I started has ended"
          name="mailAboutFits"
          checked={settings.mailAboutFits}
          onChange={(event) => void change(event.target.checked)}
          help="When it has met its target, used its draws up, failed, or was stopped by somebody else. The mail holds a link and no result."
        />
        <RequestMessage error={error} title="The setting was not changed" />
      </div>
    </IndexSection>
  );
}
