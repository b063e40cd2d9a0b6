/**
 * References from a statement's words to a fit, as they are typed: `{mu1 of fit 2}`, `{95 % mu1 of fit 2}`,
 * `{gate of fit 2}`. A reference is kept as words, so that the number can't go stale.
 */

/** How the marginal of one quantity is given, in the order of the menu. `summary` is written without a word. */
export const statistics = ['summary', 'median', 'mean', '68 %', '95 %', '97.5 %', 'R-hat', 'ESS'] as const;
export type Statistic = (typeof statistics)[number];

/** What of the fit itself can be named, in the order of the menu. */
export const facts = [
  'measurement',
  'template',
  'bins',
  'left out',
  'draws',
  'replicas',
  'gate',
  'snapshot',
] as const;
export type Fact = (typeof facts)[number];

export type Reference =
  | { kind: 'fact'; fact: Fact; fit: number }
  | { kind: 'marginal'; statistic: Statistic; quantity: string; fit: number };

/** The menu's words for each way of giving a marginal. */
export const statisticWords: Readonly<Record<Statistic, string>> = {
  summary: 'median with its 68 % interval',
  median: 'median',
  mean: 'mean ± standard deviation',
  '68 %': '68 % interval',
  '95 %': '95 % interval',
  '97.5 %': 'value that 97.5 % of the draws lie below',
  'R-hat': 'R-hat',
  ESS: 'effective sample size',
};

/** The menu's words for each fact. */
export const factWords: Readonly<Record<Fact, string>> = {
  measurement: 'name of the measurement',
  template: 'name of the template',
  bins: 'number of bins',
  'left out': 'bins left out, with the reasons',
  draws: 'number of kept draws',
  replicas: 'number of replicas',
  gate: 'whether the gate is met',
  snapshot: 'checksum of the snapshot',
};

/** The reference as it is typed, in its one canonical spelling, braces included. */
export function writeReference(reference: Reference): string {
  if (reference.kind === 'fact') return `{${reference.fact} of fit ${reference.fit}}`;
  const { statistic, quantity, fit } = reference;
  return `{${statistic === 'summary' ? '' : `${statistic} `}${quantity} of fit ${fit}}`;
}

const spaces = /[\s\u00a0\u2009\u202f]+/g;
/** Longest number of a fit that is taken, in digits. */
const numberDigits = 6;

/** One way of giving a marginal, however its spaces and capitals are typed; null where it is none. */
function statisticOf(words: string): Statistic | null {
  const bare = words.replace(spaces, '').toLowerCase();
  return (
    statistics.find((each) => each !== 'summary' && each.replace(spaces, '').toLowerCase() === bare) ?? null
  );
}

/**
 * Reads what stands between the braces.
 *
 * @param body text without its braces, one line
 * @returns the reference, or a message that says what is wrong and what to write instead
 */
export function readReference(body: string): Reference | { message: string } {
  const words = body.replace(spaces, ' ').trim();
  const parts = /^(.*?)\s*\bof fit (\S+)$/i.exec(words);
  if (!parts) {
    return {
      message: `“{${words}}” doesn’t say which fit. Write {mu1 of fit 1}, or {{ for a brace of your own.`,
    };
  }
  const [, what, number] = parts;
  const fit = new RegExp(`^[1-9]\\d{0,${numberDigits - 1}}$`).test(number) ? Number(number) : null;
  if (fit === null) return { message: `“${number}” is no number of a fit. Write {mu1 of fit 1}.` };
  const fact = facts.find((each) => each === what.toLowerCase());
  if (fact) return { kind: 'fact', fact, fit };
  const split = /^(?:(.+) )?([A-Za-z]\w*)$/.exec(what);
  if (!split)
    return { message: `“${what}” names no quantity. Write {mu1 of fit ${fit}} or {gate of fit ${fit}}.` };
  const [, before, quantity] = split;
  if (before === undefined) return { kind: 'marginal', statistic: 'summary', quantity, fit };
  const statistic = statisticOf(before);
  if (statistic === null) {
    return {
      message: `“${before}” is no way to give ${quantity}. Write ${statistics.slice(1).join(', ')}, or nothing for the median with its 68 % interval.`,
    };
  }
  return { kind: 'marginal', statistic, quantity, fit };
}
