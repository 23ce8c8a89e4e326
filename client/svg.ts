const SVG = 'http://www.w3.org/2000/svg';

/** An SVG element with attributes and children. */
export function shape<K extends keyof SVGElementTagNameMap>(
  tag: K,
  attributes: Record<string, string | number>,
  ...children: Node[]
): SVGElementTagNameMap[K] {
  const made = document.createElementNS(SVG, tag);
  for (const [name, value] of Object.entries(attributes)) made.setAttribute(name, String(value));
  made.append(...children);
  return made;
}

/** Words in an SVG drawing, their baseline at (x, y). */
export function svgWords(
  x: number,
  y: number,
  text: string,
  anchor: 'start' | 'middle' | 'end' = 'start',
  name = '',
): SVGTextElement {
  const made = shape('text', { x: x.toFixed(1), y: y.toFixed(1), 'text-anchor': anchor });
  if (name !== '') made.setAttribute('class', name);
  made.textContent = text;
  return made;
}
