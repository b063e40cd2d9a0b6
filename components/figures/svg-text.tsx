/** A symbol inside a drawing: italic letter, upright subscript on a lowered line. */
export function SvgSym({ base, sub }: { base: string; sub?: string }) {
  return (
    <>
      <tspan fontStyle="italic">{base}</tspan>
      {sub ? (
        <>
          <tspan dy="3.5" fontSize="0.72em">
            {sub}
          </tspan>
          {/* The line is raised again by a character without width. */}
          <tspan dy="-3.5">{'\u200b'}</tspan>
        </>
      ) : null}
    </>
  );
}

/** S(κ) */
export function ShapeName() {
  return (
    <>
      <tspan fontStyle="italic">S</tspan>(<tspan fontStyle="italic">κ</tspan>)
    </>
  );
}

/** κ = k_long/k_short */
export function KappaName() {
  return (
    <>
      <tspan fontStyle="italic">κ</tspan>
      {'\u00a0=\u00a0'}
      <tspan fontStyle="italic">k</tspan>
      <tspan dy="3" fontSize="0.75em">
        long
      </tspan>
      <tspan dy="-3">/</tspan>
      <tspan fontStyle="italic">k</tspan>
      <tspan dy="3" fontSize="0.75em">
        short
      </tspan>
    </>
  );
}
