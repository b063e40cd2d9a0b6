/** Files with small injuries, for tests that a reader withstands them. */

/** A linear congruential generator (Numerical Recipes' constants), whole numbers below `limit`. */
export function generator(seed: number): (limit: number) => number {
  let state = seed >>> 0;
  return (limit) => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return Math.floor((state / 2 ** 32) * limit);
  };
}

const signs = Array.from('\0\n\r\t ,;"#.-+eED019x[(κ\u00ff', (sign) => sign.charCodeAt(0) & 255);

/** One to eight small injuries: a byte changed, put in or taken out; a stretch doubled, lost or moved; the end cut off. */
export function mutate(bytes: Uint8Array, below: (limit: number) => number): Uint8Array {
  let result = Array.from(bytes);
  for (let times = 1 + below(8); times > 0; times -= 1) {
    const at = below(result.length + 1);
    const length = below(40);
    const kind = below(7);
    if (kind === 0) result[at] = signs[below(signs.length)];
    else if (kind === 1) result[at] = below(256);
    else if (kind === 2) result.splice(at, 0, signs[below(signs.length)]);
    else if (kind === 3) result.splice(at, length);
    else if (kind === 4) result.splice(below(result.length + 1), 0, ...result.slice(at, at + length));
    else if (kind === 5) result.push(...result.splice(at, length));
    else if (below(10) === 0) result = result.slice(0, at);
  }
  return Uint8Array.from(result.filter((byte) => byte !== undefined));
}
