/** Name of the cookie that remembers the last group. Cookies ignore ports, and two instances may share a browser. */
export const lastGroupCookie = (port: string): string => `beatnote-${port || 'site'}.last-group`;

/** Remembers for the first page which group was open last; it opens nothing to anybody who isn't a member. */
export function rememberGroup(id: string): void {
  document.cookie = `${lastGroupCookie(window.location.port)}=${id}; path=/; max-age=31536000; samesite=lax`;
}
