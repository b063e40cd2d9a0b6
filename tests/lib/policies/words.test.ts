import { describe, expect, it } from 'vitest';
import { actions, may } from '@/lib/policies';
import { permissions } from '@/lib/policies/words';
import { roles } from '@/lib/schemas';

describe('the rules in words', () => {
  it('say of each role what the rules allow, each thing once', () => {
    const said = permissions();
    expect(new Set(said.map(({ words }) => words)).size).toBe(said.length);
    const of = (words: string) => said.find((one) => one.words === words)?.roles;
    expect(of('invite people')).toEqual(roles.filter((role) => may(role, 'group.invite')));
    expect(of('open and edit notebooks')).toEqual(['lead', 'analyst']);
    expect(of('leave the group')).toEqual([...roles]);
  });

  it('promise a role nothing that is refused it, and keep silent on nothing that sets roles apart', () => {
    const said = permissions();
    const patterns = actions.map((action) => roles.filter((role) => may(role, action)).join());
    for (const { roles: allowed } of said) expect(patterns).toContain(allowed.join());
    for (const pattern of new Set(patterns)) expect(said.map((one) => one.roles.join())).toContain(pattern);
  });
});
