import dynamic from 'next/dynamic';

/** Why a section can't be saved as usual while two versions of it stand. */
export const twoStand = 'Choose between the two versions below.';

/** Both sides of an edit that met another one; loaded when two people have met. */
export const ConflictMessage = dynamic(() =>
  import('./conflict-choice').then((module) => module.ConflictChoice),
);
