import { Button } from '@/components/ui/button';
import type { Prior } from '@/lib/templates';

/** A column whose coefficient is held at 0 takes no part in the fit. */
export const isSwitchedOff = (prior: Prior): boolean => prior.kind === 'fixed' && prior.value === 0;

/** Leaves a column of the measurement out of the fit, or takes it in again with its default prior. */
export function ColumnSwitch({
  name,
  on,
  onSwitch,
}: {
  name: string;
  on: boolean;
  onSwitch: (on: boolean) => void;
}) {
  const words = on ? 'Leave it out' : 'Fit it';
  return (
    <span className="mt-[3px] block">
      <Button aria-label={`${words}, column ${name}`} onClick={() => onSwitch(!on)}>
        {words}
      </Button>
    </span>
  );
}
