import { User } from '@/models';
import { createSignInLink } from '@/lib/auth/links';
import { database } from '@/lib/db';
import { accounts, demoEmail, siteAdministrator } from './demo/scenario';

/** Prints a one-time sign-in link for each demo account that exists. */
const sequelize = database();
const emails = [...accounts.map(demoEmail), siteAdministrator];
const known = new Set((await User.findAll({ where: { email: emails } })).map(({ email }) => email));
if (known.size > 0) process.stdout.write('  One-time sign-in links, for whoever reads this terminal:\n');
for (const email of emails.filter((each) => known.has(each))) {
  process.stdout.write(`  ${email.padEnd(34)}  ${await createSignInLink(email)}\n`);
}
await sequelize.close();
process.exit(0);
