import { saveFile } from './save.ts';

/** What makes the look of a drawn element; everything else is left to the defaults of SVG. */
const LOOK = [
  'fill',
  'fill-opacity',
  'stroke',
  'stroke-width',
  'stroke-dasharray',
  'stroke-linejoin',
  'stroke-linecap',
  'paint-order',
  'opacity',
  'font-family',
  'font-size',
  'font-weight',
  'font-style',
];
const MARGIN = 12;
const PNG_SCALE = 3;

interface FigureFile {
  text: string;
  width: number;
  height: number;
}

/**
 * A drawn figure as a file of its own: the look that the style sheets give is written into each element, in the colours of
 * paper whatever the scheme of the page, with a margin and a ground.
 */
function writeFigure(figure: SVGSVGElement, title: string): FigureFile {
  const stage = document.createElement('div');
  stage.className = 'as-on-paper';
  const clone = figure.cloneNode(true) as SVGSVGElement;
  for (const passing of clone.querySelectorAll('[data-passing]')) passing.remove();
  stage.append(clone);
  document.body.append(stage);
  const paper = getComputedStyle(stage).backgroundColor;
  for (const element of clone.querySelectorAll<SVGElement>('*')) {
    const style = getComputedStyle(element);
    for (const name of LOOK) element.setAttribute(name, style.getPropertyValue(name));
  }
  for (const element of clone.querySelectorAll('[class]')) element.removeAttribute('class');
  stage.remove();
  const width = figure.clientWidth + 2 * MARGIN;
  const height = figure.clientHeight + 2 * MARGIN;
  clone.removeAttribute('class');
  clone.setAttribute('xmlns', 'http://www.w3.org/2000/svg');
  clone.setAttribute('width', String(width));
  clone.setAttribute('height', String(height));
  clone.setAttribute('viewBox', `${-MARGIN} ${-MARGIN} ${width} ${height}`);
  const ground = document.createElementNS('http://www.w3.org/2000/svg', 'rect');
  for (const [name, value] of Object.entries({ x: -MARGIN, y: -MARGIN, width, height, fill: paper }))
    ground.setAttribute(name, String(value));
  const heading = document.createElementNS('http://www.w3.org/2000/svg', 'title');
  heading.textContent = title;
  clone.prepend(heading, ground);
  return { text: new XMLSerializer().serializeToString(clone), width, height };
}

export function saveFigureAsSvg(figure: SVGSVGElement, nameParts: readonly string[]): void {
  const { text } = writeFigure(figure, nameParts.join(', '));
  saveFile(new Blob([text], { type: 'image/svg+xml' }), nameParts, 'svg');
}

/** Three pixels to each px of the page. Rejects when the browser cannot draw the figure. */
export async function saveFigureAsPng(figure: SVGSVGElement, nameParts: readonly string[]): Promise<void> {
  const { text, width, height } = writeFigure(figure, nameParts.join(', '));
  const url = URL.createObjectURL(new Blob([text], { type: 'image/svg+xml' }));
  try {
    const image = new Image();
    image.src = url;
    await image.decode();
    const canvas = document.createElement('canvas');
    canvas.width = width * PNG_SCALE;
    canvas.height = height * PNG_SCALE;
    canvas.getContext('2d')?.drawImage(image, 0, 0, canvas.width, canvas.height);
    const blob = await new Promise<Blob | null>((resolve) => canvas.toBlob(resolve, 'image/png'));
    if (!blob) throw new Error(`a picture of ${canvas.width} × ${canvas.height} pixels is too large for this browser`);
    saveFile(blob, nameParts, 'png');
  } finally {
    URL.revokeObjectURL(url);
  }
}
