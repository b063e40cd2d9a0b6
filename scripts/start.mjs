import { Refusal, say } from './supervisor/console.mjs';
import { endRunningCommands } from './supervisor/commands.mjs';
import { installDebianPackages, installNodePackages, refuseOtherNode } from './supervisor/install.mjs';

/** `npm start`: installs what is missing, starts everything, stays until it is told to stop, stops everything. */

let instance = null;
let leaving = false;

async function leave(code) {
  if (leaving) return;
  leaving = true;
  endRunningCommands();
  await instance?.stop();
  process.exit(code);
}

for (const name of ['SIGINT', 'SIGTERM', 'SIGHUP']) {
  process.on(name, () => {
    if (!leaving) say('Stopping');
    void leave(0);
  });
}

try {
  refuseOtherNode();
  await installNodePackages();
  const services = ['mariadbd', 'mariadb-install-db', 'mariadb'];
  await installDebianPackages([
    ...(process.env.DATABASE_URL ? [] : services),
    ...(process.env.REDIS_URL ? [] : ['redis-server']),
  ]);
  const { Instance } = await import('./supervisor/instance.mjs');
  instance = new Instance();
  await instance.start();
  if (!leaving) {
    const { output } = await instance.script('sign-in-links');
    say('Ready');
    process.stdout.write(
      `\n  ${instance.environment.BEATNOTE_URL}\n\n${output}\n  Ctrl-C stops everything.\n\n`,
    );
  }
} catch (error) {
  if (!leaving) {
    process.stderr.write(`\n${error instanceof Refusal ? error.message : (error.stack ?? error)}\n`);
    await leave(1);
  }
}
