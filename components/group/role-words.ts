import { listed } from '@/components/words/counts';
import { roles, type Role } from '@/lib/schemas';

/** One thing that members may do, and who of them: handed down from the rules. */
export interface Permission {
  words: string;
  roles: readonly Role[];
}

const article = (role: Role): string => (role === 'analyst' ? 'An' : 'A');

/** "A referee may read the log, read measurements and leave the group." */
export function roleSentence(role: Role, permissions: readonly Permission[]): string {
  const words = permissions.filter((one) => one.roles.includes(role)).map((one) => one.words);
  return `${article(role)} ${role} may ${listed(words)}.`;
}

/** For a choice of a role. */
export const roleOptions = roles.map((role) => ({ value: role, label: role }));

/** Members with their roles, in one line: "a, lead · b, c, analysts · d, referee". */
export function membersLine(members: readonly { email: string; role: Role }[]): string {
  return roles
    .flatMap((role) => {
      const of = members.filter((member) => member.role === role).map(({ email }) => email);
      return of.length ? [`${of.join(', ')}, ${role}${of.length > 1 ? 's' : ''}`] : [];
    })
    .join(' · ');
}
