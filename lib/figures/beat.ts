import { linePath } from './paths';

/** Size of a beat motif in user units; `carriers` and `beats` are whole numbers over its width. */
export interface BeatShape {
  width: number;
  height: number;
  carriers: number;
  beats: number;
}

/**
 * Two close tones added: ½[sin(ω₁x) + sin(ω₂x)] = sin(ω̄x) · sin(Δx), with its envelope ±|sin(Δx)|.
 *
 * @param shape its size; the motif fills 0 … width and 0 … height
 * @returns path data of the carrier and of the two halves of the envelope
 */
export function beatPath(shape: BeatShape): { carrier: string; upper: string; lower: string } {
  const { width, height, carriers, beats } = shape;
  const n = Math.max(2, Math.ceil(carriers * 24));
  const x = Float64Array.from({ length: n + 1 }, (_, i) => (width * i) / n);
  const middle = height / 2;
  const envelope = x.map((v) => Math.abs(Math.sin((Math.PI * beats * v) / width)));
  const carrier = x.map(
    (v) =>
      middle -
      middle * Math.sin((Math.PI * beats * v) / width) * Math.sin((2 * Math.PI * carriers * v) / width),
  );
  return {
    carrier: linePath(x, carrier),
    upper: linePath(
      x,
      envelope.map((e) => middle - middle * e),
    ),
    lower: linePath(
      x,
      envelope.map((e) => middle + middle * e),
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
