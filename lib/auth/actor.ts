/** A signed-in person, however they proved it. */
export interface Actor {
  userId: string;
  email: string;
}
