import { parseNumber } from '@/lib/figures/format';

/**
 * Reads values that simulated data were made with: "mu1 = 1.3, g = 12", one or more lines, commas or semicolons between.
 *
 * @returns the values by name, null where nothing is written; or what is wrong with the first entry that can't be read
 */
export function parseTruth(text: string): { values: Record<string, number> | null } | { fault: string } {
  const values: Record<string, number> = {};
  for (const entry of text.split(/[,;\n]/).map((each) => each.trim())) {
    if (!entry) continue;
    const [, name, written] = /^([A-Za-z]\w*)\s*[=:]\s*(.+)$/.exec(entry) ?? [];
    const value = written === undefined ? null : parseNumber(written);
    if (name === undefined || value === null)
      return { fault: `“${entry}” isn’t a name and a number; write it as mu1 = 1.3.` };
    if (name in values) return { fault: `${name} is given twice.` };
    values[name] = value;
  }
  return { values: Object.keys(values).length ? values : null };
}
