import type { Config } from 'tailwindcss';

/** A size and line of app/globals.css (`--fs-…`, `--lh-…`), so that phone sizes change in one place. */
function type(name: string, weight = '400', letterSpacing = 'normal') {
  return [`var(--fs-${name})`, { lineHeight: `var(--lh-${name})`, fontWeight: weight, letterSpacing }];
}

/** Every class is a token: no colour, size or family stands outside app/globals.css. */
const config = {
  content: ['./app/**/*.{ts,tsx}', './components/**/*.{ts,tsx}'],
  theme: {
    screens: { tablet: '760px', desk: '1180px' },
    colors: {
      transparent: 'transparent',
      current: 'currentColor',
      paper: 'var(--paper)',
      'paper-sunk': 'var(--paper-sunk)',
      ink: 'var(--ink)',
      'ink-2': 'var(--ink-2)',
      'ink-3': 'var(--ink-3)',
      hairline: 'var(--hairline)',
      rule: 'var(--rule)',
      action: 'var(--action)',
      'action-strong': 'var(--action-strong)',
      'on-action': 'var(--on-action)',
      ok: 'var(--ok)',
      warn: 'var(--warn)',
      bad: 'var(--bad)',
      'field-1': 'var(--field-1)',
      'field-2': 'var(--field-2)',
      'field-3': 'var(--field-3)',
      'field-4': 'var(--field-4)',
      'band-68': 'var(--band-68)',
      'band-95': 'var(--band-95)',
    },
    spacing: {
      0: '0px',
      px: '1px',
      q: 'var(--q)',
      1: 'var(--s-1)',
      2: 'var(--s-2)',
      3: 'var(--s-3)',
      4: 'var(--s-4)',
      6: 'var(--s-6)',
      8: 'var(--s-8)',
      12: 'var(--s-12)',
      16: 'var(--s-16)',
      gutter: 'var(--gutter)',
      target: 'var(--target)',
    },
    maxWidth: {
      none: 'none',
      measure: 'var(--measure)',
      caption: '600px',
      figure: 'var(--figure)',
      page: 'calc(var(--page) + 2 * var(--gutter))',
    },
    fontFamily: { words: 'var(--words)', controls: 'var(--controls)', numbers: 'var(--numbers)' },
    fontSize: {
      title: type('title', '400', '-0.012em'),
      heading: type('heading', '400', '-0.008em'),
      lead: type('lead'),
      entry: type('entry'),
      body: type('body', 'var(--w-text)'),
      subheading: type('subheading', '600'),
      small: type('small', 'var(--w-text)'),
      control: type('control', '500'),
      note: type('note'),
      number: type('number'),
      record: type('record'),
    },
    fontWeight: { normal: '400', text: 'var(--w-text)', medium: '500', semibold: '600', current: '650' },
    borderRadius: { none: '0', DEFAULT: 'var(--radius)' },
    transitionDuration: { quick: 'var(--quick)', calm: 'var(--calm)' },
    transitionTimingFunction: { DEFAULT: 'var(--ease)' },
  },
} satisfies Config;

export default config;
