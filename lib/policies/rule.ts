import type { Role } from '@/lib/schemas';

/** Who may take an action, by role. */
export type Rules = Record<`${string}.${string}`, readonly Role[]>;
