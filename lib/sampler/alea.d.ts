declare module 'seedrandom/lib/alea.js' {
  interface AleaState {
    c: number;
    s0: number;
    s1: number;
    s2: number;
  }
  interface AleaGenerator {
    /** 53 bits in [0, 1), from two steps. */
    double(): number;
    state(): AleaState;
  }
  /** `state: true` makes the state readable; a state given restores it and the seed is ignored. */
  export default function alea(seed: string, options: { state: true | AleaState }): AleaGenerator;
}
