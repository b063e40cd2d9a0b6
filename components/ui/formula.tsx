import katex from 'katex';

/** Names the only thing a formula may ask for beyond plain KaTeX: the class of a field's term. */
const fieldClass = /^f[1-4]$/;

/** Formulas are few and typesetting is slow: the last ones are kept, the least used of them goes first. */
const typeset = new Map<string, string>();
const mostTypeset = 200;

function typesetOf(tex: string): string {
  const html =
    typeset.get(tex) ??
    katex.renderToString(tex, {
      displayMode: true,
      throwOnError: false,
      errorColor: 'var(--bad)',
      output: 'htmlAndMathml',
      strict: (code: string) => (code === 'htmlExtension' ? 'ignore' : 'warn'),
      trust: (context) => context.command === '\\htmlClass' && fieldClass.test(context.class ?? ''),
    });
  typeset.delete(tex);
  typeset.set(tex, html);
  if (typeset.size > mostTypeset) typeset.delete([...typeset.keys()][0]);
  return html;
}

/**
 * A display formula, left aligned. It breaks after + and − where the column is narrow. A formula that KaTeX can't read is
 * shown as written, in the colour of an error, rather than taking the page down.
 */
export function Formula({ tex, label }: { tex: string; label: string }) {
  const html = typesetOf(tex);
  return (
    <div
      role="group"
      className="formula"
      tabIndex={0}
      aria-label={label}
      dangerouslySetInnerHTML={{ __html: html }}
    />
  );
}
