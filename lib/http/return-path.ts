/** A path of ours to return to after signing in; anything that leads elsewhere becomes the first page. */
export function returnPath(given: string | string[] | undefined): string {
  if (typeof given !== 'string') return '/';
  try {
    const base = 'http://here.invalid';
    const url = new URL(given, base);
    return url.origin === base ? url.pathname + url.search + url.hash : '/';
  } catch {
    return '/';
  }
}
