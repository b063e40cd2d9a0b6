import { Num } from '@/components/ui/num';
import { Sym } from '@/components/ui/sym';
import { plain } from './counts';

/** "0.003 ≤ κ ≤ 0.30" */
export function KappaRange({ lo, hi }: { lo?: number; hi?: number }) {
  if (lo === undefined && hi === undefined)
    return (
      <>
        every <Sym base="κ" />
      </>
    );
  return (
    <Num>
      {lo === undefined ? null : <>{plain(lo, 3)} ≤ </>}
      <Sym base="κ" />
      {hi === undefined ? null : <> ≤ {plain(hi, 3)}</>}
    </Num>
  );
}
