/** Whoever asks the API tells here that it answered "nobody is signed in"; the page's head says so in words. */
const ended = new EventTarget();

export const tellSessionEnd = (): void => void ended.dispatchEvent(new Event('end'));

/** Calls back when an answer says that the session is over; returns how to stop. */
export function onSessionEnd(told: () => void): () => void {
  ended.addEventListener('end', told);
  return () => ended.removeEventListener('end', told);
}
