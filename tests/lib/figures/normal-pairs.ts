/** Pairs of standard normal numbers with a given correlation, from a small generator with a fixed start. */
export function normalPairs(count: number, rho: number, seed = 20270310) {
  let state = seed >>> 0;
  // mulberry32, written out so that figures' tests hang on nothing else.
  const uniform = () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = Math.imul(state ^ (state >>> 15), state | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return (((t ^ (t >>> 14)) >>> 0) + 0.5) / 4294967296;
  };
  const x = new Float64Array(count);
  const y = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    const radius = Math.sqrt(-2 * Math.log(uniform()));
    const angle = 2 * Math.PI * uniform();
    const [u, v] = [radius * Math.cos(angle), radius * Math.sin(angle)];
    x[i] = u;
    y[i] = rho * u + Math.sqrt(1 - rho * rho) * v;
  }
  return { x, y };
}
