import { linePath } from './paths';

/** Size of a beat motif in user units; `carriers` and `beats` are counted over its width. */
export interface BeatShape {
  width: number;
  height: number;
  carriers: number;
  beats: number;
  /** Whether the drawing begins where the tones cancel or where they add up. */
  start: 'node' | 'crest';
}

/**
 * Two close tones added: ½[sin ω₁x + sin ω₂x] = sin ω̄x · cos Δx, and its like from a node; with the envelope ±|cos Δx|.
 *
 * @param shape its size; the motif fills 0 … width and 0 … height
 * @returns path data of the carrier and of the two halves of the envelope
 */
export function beatPath(shape: BeatShape): { carrier: string; upper: string; lower: string } {
  const { width, height, carriers, beats, start } = shape;
  const wave = start === 'node' ? Math.sin : Math.cos;
  const n = Math.max(2, Math.ceil(carriers * 24));
  const x = Float64Array.from({ length: n + 1 }, (_, i) => (width * i) / n);
  const middle = height / 2;
  const beat = x.map((v) => middle * wave((Math.PI * beats * v) / width));
  const tone = x.map((v) => wave((2 * Math.PI * carriers * v) / width));
  return {
    carrier: linePath(
      x,
      beat.map((b, i) => middle - b * tone[i]),
    ),
    upper: linePath(
      x,
      beat.map((b) => middle - Math.abs(b)),
    ),
    lower: linePath(
      x,
      beat.map((b) => middle + Math.abs(b)),
    ),
  };
}

/**
 * One tone alone: cos with `periods` whole periods over `width`, filling 0 … height.
 *
 * @returns path data
 */
export function tonePath(width: number, height: number, periods: number): string {
  const n = Math.max(2, periods * 24);
  const x = Float64Array.from({ length: n + 1 }, (_, i) => (width * i) / n);
  return linePath(
    x,
    x.map((v) => (height / 2) * (1 - Math.cos((2 * Math.PI * periods * v) / width))),
  );
}
