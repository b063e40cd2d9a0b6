import { Fragment } from 'react';

/** Text whose exponents are written as in TeX, κ^{1/2}, with those raised. */
export function Raised({ children }: { children: string }) {
  return children
    .split(/\^\{([^}]*)\}/)
    .map((part, i) => (i % 2 ? <sup key={i}>{part}</sup> : <Fragment key={i}>{part}</Fragment>));
}
