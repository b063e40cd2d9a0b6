/** A person is known by their address; in the text the part before @ stands for them. */
export function shortName(email: string): string {
  const at = email.indexOf('@');
  return at > 0 ? email.slice(0, at) : email;
}
