/** What the person at the terminal reads: one line a step, times in seconds. */
const begun = Date.now();

export function say(message) {
  const seconds = ((Date.now() - begun) / 1000).toFixed(1).padStart(6);
  process.stdout.write(`${seconds} s  ${message}\n`);
}

/** A fault that ends the program with words instead of a stack. */
export class Refusal extends Error {}
