import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, it } from 'vitest';
import { Button } from '@/components/ui/button';
import { Contents } from '@/components/ui/contents';
import { Field } from '@/components/ui/field';
import { Formula } from '@/components/ui/formula';
import { Message } from '@/components/ui/message';
import { Stamp } from '@/components/ui/num';
import { NumberField } from '@/components/ui/number-field';
import { FoldedSection, Section } from '@/components/ui/section';
import { Slider } from '@/components/ui/slider';
import { StateWord } from '@/components/ui/state-word';
import { Sym } from '@/components/ui/sym';
import { DataTable } from '@/components/ui/table';

const nothing = () => undefined;

describe('states', () => {
  it('are a word beside a sign that assistive technology passes over', () => {
    const html = renderToStaticMarkup(<StateWord kind="ok">settled</StateWord>);
    expect(html).toMatch(/<svg[^>]*aria-hidden="true"[^>]*>.*<\/svg>settled<\/span>$/);
  });
});

describe('sections', () => {
  it('are named by their heading, of which the number is a part', () => {
    const html = renderToStaticMarkup(
      <Section id="s2" number={2} title="Template" state={{ kind: 'ok', word: 'settled' }}>
        <p>Words.</p>
      </Section>,
    );
    expect(html).toContain('<section id="s2" aria-labelledby="s2-title"');
    expect(html).toMatch(/<h2 id="s2-title"[^>]*><span[^>]*>2<\/span>Template<\/h2>/);
  });

  it('that are folded open from their title', () => {
    const html = renderToStaticMarkup(
      <FoldedSection id="s4" number={4} title="Priors" onOpen={nothing}>
        Masses uniform.
      </FoldedSection>,
    );
    expect(html).toContain('<button type="button" aria-expanded="false"');
    expect(html).toContain('Masses uniform.');
  });

  it('are listed with the current one marked', () => {
    const html = renderToStaticMarkup(
      <Contents
        label="Sections"
        current="#s2"
        entries={[
          { href: '#s1', number: 1, title: 'Measurement', state: { kind: 'ok', word: 'settled' } },
          { href: '#s2', number: 2, title: 'Template' },
        ]}
      />,
    );
    expect(html).toContain('href="#s2" aria-current="location"');
    expect(html).toMatch(/<summary[^>]*><span class="sr-only">Contents, at <\/span>.*?Template/);
  });
});

describe('controls', () => {
  it('that are disabled say why, stay reachable and do nothing', () => {
    const html = renderToStaticMarkup(
      <Button kind="primary" reason="Row 32 has to be mended first." onClick={nothing}>
        Store version 1
      </Button>,
    );
    const [, id] = /aria-describedby="([^"]+)"/.exec(html) ?? [];
    expect(html).toContain('aria-disabled="true"');
    expect(html).not.toContain('disabled=""');
    expect(html).toMatch(new RegExp(`<span id="${id}"[^>]*>Row 32 has to be mended first.</span>`));
  });

  it('give way from help to the error and tie it to the field', () => {
    const html = renderToStaticMarkup(
      <Field label="Name" name="name" id="n" help="New here." error="Give a name." />,
    );
    expect(html).toContain('<label for="n"');
    expect(html).toContain('aria-describedby="n-below"');
    expect(html).toContain('aria-invalid="true"');
    expect(html).toContain('Give a name.');
    expect(html).not.toContain('New here.');
  });

  it('show numbers with a true minus', () => {
    const html = renderToStaticMarkup(
      <NumberField label="c" value={-3.176} decimals={2} onValue={nothing} />,
    );
    expect(html).toContain('value="−3.18"');
  });

  it('move a parameter by a slider in its field’s colour with its name and ends', () => {
    const html = renderToStaticMarkup(
      <Slider
        symbol={{ base: 'μ', sub: '2' }}
        label="mass 2"
        field={1}
        lo={1}
        hi={12}
        step={0.01}
        value={6.5}
        onValue={nothing}
        prior="uniform 1 to 12"
      />,
    );
    expect(html).toMatch(/type="range"[^>]*min="1" max="12" step="0.01"[^>]*aria-label="mass 2"/);
    expect(html).toContain('stroke-field-2');
    expect(html).toContain('left:calc(7.5px + 0.5 * (100% - 15px))');
    expect(html).toContain('value="6.50"');
    expect(html).toContain('aria-label="mass 2, value"');
  });
});

describe('words and formulas', () => {
  it('set a symbol in italics with an upright subscript', () => {
    expect(renderToStaticMarkup(<Sym base="μ" sub="1" />)).toBe('<i class="sym">μ<sub>1</sub></i>');
  });

  it('write the record’s times in UTC to the minute', () => {
    const html = renderToStaticMarkup(<Stamp at="2027-03-09T16:40:12.000Z" />);
    expect(html).toContain('dateTime="2027-03-09T16:40:12.000Z"');
    expect(html).toContain('>2027-03-09 16:40</time>');
  });

  it('colour a field’s term and accept no other command that reaches outside', () => {
    const html = renderToStaticMarkup(<Formula tex={'\\htmlClass{f2}{\\mu_2}'} label="Term of field 2" />);
    expect(html).toContain('class="enclosing f2"');
    expect(html).toContain('aria-label="Term of field 2"');
    const foreign = renderToStaticMarkup(
      <Formula tex={'\\href{https://example.org}{x}\\htmlClass{fixed}{y}'} label="x" />,
    );
    expect(foreign).not.toContain('<a ');
    expect(foreign).not.toContain('class="enclosing fixed"');
  });

  it('announce an error at once, a warning when there is time, and what was there before not at all', () => {
    const role = (props: { level: 'error' | 'warning'; quiet?: boolean }) =>
      /role="(\w+)"/.exec(renderToStaticMarkup(<Message {...props} title="Connection lost" />))?.[1];
    expect(role({ level: 'error' })).toBe('alert');
    expect(role({ level: 'warning' })).toBe('status');
    expect(role({ level: 'error', quiet: true })).toBeUndefined();
  });
});

describe('tables', () => {
  it('have a numbered caption, heads for columns and rows, and scroll by keyboard', () => {
    const html = renderToStaticMarkup(
      <DataTable
        number={2}
        caption="Marginals."
        columns={[
          { key: 'p', head: 'Parameter' },
          { key: 'm', head: 'median', numeric: true, phone: { area: '1/2', label: 'median' } },
        ]}
        rows={[{ key: 'mu1', cells: { p: 'μ1', m: '3.6' } }]}
      />,
    );
    expect(html).toContain('<b>Table 2. </b>Marginals.');
    expect(html.match(/scope="col"/g)).toHaveLength(2);
    expect(html.match(/scope="row"/g)).toHaveLength(1);
    expect(html).toContain('role="region" aria-label="Table 2" tabindex="0"');
  });
});
