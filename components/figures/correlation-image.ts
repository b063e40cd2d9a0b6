/** r of bins i and j from the values below the diagonal, row by row. */
export function correlationAt(values: ArrayLike<number>, i: number, j: number): number {
  if (i === j) return 1;
  const [row, column] = i > j ? [i, j] : [j, i];
  return values[(row * (row - 1)) / 2 + column];
}

/** Part of full strength at |r|; a square root lets the small correlations between far bins be seen. */
export const strength = (r: number): number => Math.sqrt(Math.min(1, Math.abs(r)));

/**
 * One pixel a pair of bins, white in the strength of its correlation where it has the sign, black elsewhere: a mask through
 * which a colour of the page shows, so that light, dark and print need no other image. Bin 0 stands at the lower left.
 */
export function correlationMask(values: ArrayLike<number>, rows: number, sign: 1 | -1): string {
  const canvas = document.createElement('canvas');
  canvas.width = rows;
  canvas.height = rows;
  const context = canvas.getContext('2d');
  if (!context) return '';
  const image = context.createImageData(rows, rows);
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j < rows; j++) {
      const r = correlationAt(values, i, j);
      const level = r * sign > 0 ? Math.round(255 * strength(r)) : 0;
      const at = 4 * ((rows - 1 - i) * rows + j);
      image.data.fill(level, at, at + 3);
      image.data[at + 3] = 255;
    }
  }
  context.putImageData(image, 0, 0);
  return canvas.toDataURL('image/png');
}
