import type { Metadata } from 'next';
import { PageChrome } from '@/components/account/page-chrome';
import { Button, Buttons } from '@/components/ui/button';
import { BrokenTone } from '@/components/ui/motif';
import { PageHead } from '@/components/ui/section';
import { Sheet } from '@/components/ui/sheet';
import { version } from '@/lib/http/page-data';

export const metadata: Metadata = { title: 'Not found' };

/** The same words for what doesn't exist and for what belongs to another group. */
export default function NotFound() {
  return (
    <PageChrome version={version}>
      <Sheet>
        <PageHead
          title="There is no such page"
          abstract="The address names nothing that is here, or something that you have no access to. Nothing was changed."
        >
          <BrokenTone at={0.42} />
          <Buttons>
            <Button kind="primary" href="/">
              To your groups
            </Button>
          </Buttons>
        </PageHead>
      </Sheet>
    </PageChrome>
  );
}
