import { toCsv, type FigureNumbers } from '@/lib/figures/csv';

/** What a drawing takes from style sheets; written into each element of a saved one, which has none. */
const inherited = [
  'fill',
  'stroke',
  'stroke-width',
  'stroke-dasharray',
  'stroke-linejoin',
  'stroke-linecap',
  'opacity',
  'font-family',
  'font-size',
  'font-style',
  'font-weight',
];

const margin = 14;

/** A copy that stands by itself, in the light colours whatever the page has. */
function standalone(svg: SVGSVGElement): { text: string; width: number; height: number } {
  const box = svg.getBoundingClientRect();
  const width = box.width + 2 * margin;
  const height = box.height + 2 * margin;
  const stage = document.createElement('div');
  stage.dataset.colours = 'light';
  stage.className = 'fig-svg';
  stage.style.cssText = 'position:absolute;left:-9999px;top:0';
  const copy = svg.cloneNode(true) as SVGSVGElement;
  stage.append(copy);
  document.body.append(stage);
  for (const element of [copy, ...copy.querySelectorAll<SVGElement>('*')]) {
    const style = getComputedStyle(element);
    for (const name of inherited) element.style.setProperty(name, style.getPropertyValue(name));
  }
  const paper = document.createElementNS('http://www.w3.org/2000/svg', 'rect');
  paper.setAttribute('x', String(-margin));
  paper.setAttribute('y', String(-margin));
  paper.setAttribute('width', String(width));
  paper.setAttribute('height', String(height));
  paper.setAttribute('fill', getComputedStyle(stage).getPropertyValue('--paper'));
  copy.prepend(paper);
  for (const element of [copy, ...copy.querySelectorAll('*')]) element.removeAttribute('class');
  copy.setAttribute('xmlns', 'http://www.w3.org/2000/svg');
  copy.setAttribute('width', String(width));
  copy.setAttribute('height', String(height));
  copy.setAttribute('viewBox', `${-margin} ${-margin} ${width} ${height}`);
  stage.remove();
  return { text: new XMLSerializer().serializeToString(copy), width, height };
}

function inRange(face: CSSFontFaceRule, characters: Set<number>): boolean {
  const ranges = face.style.getPropertyValue('unicode-range');
  if (!ranges) return true;
  return ranges.split(',').some((range) => {
    const [from, to = from] = range.trim().replace(/^U\+/i, '').split('-');
    const lo = parseInt(from, 16);
    const hi = parseInt(to, 16);
    return [...characters].some((c) => c >= lo && c <= hi);
  });
}

async function asDataAddress(address: string): Promise<string> {
  const blob = await (await fetch(address)).blob();
  return new Promise((resolve, reject) => {
    const reader = new FileReader();
    reader.onload = () => resolve(String(reader.result));
    reader.onerror = () => reject(reader.error ?? new Error(`The font at ${address} can't be read.`));
    reader.readAsDataURL(blob);
  });
}

/** The page's own font faces that the text needs, as style rules that hold the fonts themselves. */
async function fontRules(text: string): Promise<string> {
  const characters = new Set([...text].map((c) => c.codePointAt(0) ?? 0));
  const faces = [...document.styleSheets]
    .flatMap((sheet) => [...sheet.cssRules])
    .filter((rule) => rule instanceof CSSFontFaceRule)
    .filter((face) => {
      const family = face.style.getPropertyValue('font-family').replace(/["']/g, '');
      return text.includes(family) && inRange(face, characters);
    });
  const rules = await Promise.all(
    faces.map(async (face) => {
      const source = /url\(["']?([^"')]+)["']?\)/.exec(face.style.getPropertyValue('src'));
      if (!source) return '';
      const address = new URL(source[1], face.parentStyleSheet?.href ?? document.baseURI).href;
      return face.cssText.replace(/src:[^;]+;/, `src: url(${await asDataAddress(address)});`);
    }),
  );
  return rules.join('\n');
}

function download(blob: Blob, name: string) {
  const address = URL.createObjectURL(blob);
  const link = document.createElement('a');
  link.href = address;
  link.download = name;
  link.click();
  // The browser has taken the address by the next turn of its loop; a second is ample.
  window.setTimeout(() => URL.revokeObjectURL(address), 1000);
}

async function withFonts(svg: SVGSVGElement) {
  const drawn = standalone(svg);
  const rules = await fontRules(drawn.text);
  const text = drawn.text.replace(/(<svg[^>]*>)/, `$1<style>${rules.replace(/</g, '&lt;')}</style>`);
  return { ...drawn, text };
}

/** Saves any text as a file. */
function saveText(text: string, name: string, type: string) {
  download(new Blob([text], { type: `${type};charset=utf-8` }), name);
}

/** Saves a drawing as SVG with its colours and fonts inside. */
/** The numbers of a figure as CSV. */
export function saveCsv(numbers: FigureNumbers, name: string): void {
  saveText(toCsv(numbers), `${name}.csv`, 'text/csv');
}

export async function saveSvg(svg: SVGSVGElement, name: string): Promise<void> {
  saveText((await withFonts(svg)).text, `${name}.svg`, 'image/svg+xml');
}

/** Saves a drawing as PNG at three pixels a unit, enough for print at column width. */
export async function savePng(svg: SVGSVGElement, name: string): Promise<void> {
  const { text, width, height } = await withFonts(svg);
  const image = new Image();
  image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(text)}`;
  await image.decode();
  const canvas = document.createElement('canvas');
  canvas.width = Math.round(3 * width);
  canvas.height = Math.round(3 * height);
  canvas.getContext('2d')?.drawImage(image, 0, 0, canvas.width, canvas.height);
  const blob = await new Promise<Blob | null>((resolve) => canvas.toBlob(resolve, 'image/png'));
  if (blob) download(blob, `${name}.png`);
}
