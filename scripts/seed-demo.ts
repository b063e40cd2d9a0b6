import { authorise } from '@/lib/services/access';
import { createGroup } from '@/lib/services/groups';
import { createNotebook } from '@/lib/services/notebooks';
import { uploadMeasurement } from '@/lib/services/measurement-upload';
import { database } from '@/lib/db';
import { Group, Membership, User } from '@/models';
import {
  accounts,
  couplingPrior,
  demoEmail,
  groupName,
  siteAdministrator,
  twoFieldFiles,
  twoFieldOptions,
} from './demo/scenario';

/** Fills an empty instance with the demo: accounts, a group, an invented measurement and a notebook on it. */

const bytes = (text: string): Buffer => Buffer.from(text, 'utf8');

async function fill(): Promise<void> {
  const people = new Map<string, User>();
  for (const name of accounts) {
    people.set(name, await User.create({ email: demoEmail(name) }));
  }
  await User.create({ email: siteAdministrator, siteAdmin: true });
  const actorOf = (name: string) => ({
    userId: people.get(name)!.id,
    email: demoEmail(name),
    siteAdmin: false,
  });
  const { id: groupId } = await createGroup(actorOf('lead'), { name: groupName });
  for (const role of accounts.filter((name) => name !== 'lead')) {
    await Membership.create({ groupId, userId: people.get(role)!.id, role, createdAt: new Date() });
  }
  const analyst = await authorise(actorOf('analyst'), 'group', groupId, 'measurement.upload');
  const files = twoFieldFiles();
  const meta = {
    name: 'Larkfield deep field',
    description: 'An invented survey: two mixed fields with masses that are put in, and 600 mocks.',
    simulated: true,
  };
  const { id: measurement } = await uploadMeasurement(analyst, {
    file: { fileName: 'larkfield.csv', bytes: bytes(files.points) },
    mocks: { fileName: 'larkfield-mocks.csv', bytes: bytes(files.mocks) },
    meta: { fileName: '', bytes: bytes(JSON.stringify(meta)) },
  });
  await createNotebook(analyst, {
    title: 'Two mixed fields in the Larkfield deep field',
    measurement,
    template: { id: 'locked-squeezed', options: twoFieldOptions },
    priors: { g: couplingPrior },
  });
}

const sequelize = database();
if ((await Group.count()) === 0 && (await User.count()) === 0) {
  await fill();
  process.stdout.write('The demo is filled in.\n');
}
await sequelize.close();
process.exit(0);
