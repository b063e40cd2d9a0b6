/** Height of one panel of ranks with its axis, in pixels; a multiple of 7 keeps the text on its grid. */
export const rankCell = 154;

export const rankColumns = (panels: number, narrow: boolean): number => (narrow ? 2 : panels <= 6 ? 3 : 4);

export const rankRows = (panels: number, narrow: boolean): number =>
  Math.ceil(panels / rankColumns(panels, narrow));
