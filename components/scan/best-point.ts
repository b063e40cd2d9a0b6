import type { NamedPoint } from '@/components/notebook/template-section';
import type { Scan } from '@/lib/schemas';

/** Where a scan fits best: with all that it knows of one field, or the two masses of its plane; null before it has ended. */
export function bestOfScan(scan: Scan | null): NamedPoint | null {
  if (!scan?.best) return null;
  const label = `Best of scan ${scan.number}`;
  const pair = scan.plane?.best.mu;
  return pair
    ? { label, values: { mu1: pair[0], mu2: pair[1] }, fillIn: true }
    : { label, values: scan.best.parameters, fillIn: true };
}
