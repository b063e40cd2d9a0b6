import { database } from '@/lib/db';
import { fillDemo } from './demo/fill';

/** Fills an empty instance with the demo, or goes on where an earlier start was ended. */
const sequelize = database();
if (await fillDemo()) process.stdout.write('The demo is filled in.\n');
await sequelize.close();
process.exit(0);
