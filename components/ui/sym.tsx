/** A mathematical symbol: serif italic with an upright subscript, also inside controls. */
export function Sym({ base, sub }: { base: string; sub?: string }) {
  return (
    <i className="sym">
      {base}
      {sub ? <sub>{sub}</sub> : null}
    </i>
  );
}

/** The same as words for an accessible name: "μ 1". */
export function symbolName({ base, sub }: { base: string; sub: string }): string {
  return sub ? `${base} ${sub}` : base;
}
