import { Formula } from '@/components/ui/formula';

/** How a bispectrum becomes S; the two lines of docs/measurement-files.md. */
export function SpectrumFormula() {
  return (
    <>
      <Formula
        label="The shape function from the bispectrum"
        tex={String.raw`S = \frac{(k_1 k_2 k_3)^2\, B(k_1,k_2,k_3)}{(2\pi)^4\, [P_\zeta(k_1)\, P_\zeta(k_2)\, P_\zeta(k_3)]^{2/3}}`}
      />
      <Formula
        label="The power spectrum"
        tex={String.raw`P_\zeta(k) = A_s\, (k/k_*)^{n_s-1} = k^3\, |\zeta_k|^2 / (2\pi^2)`}
      />
    </>
  );
}
