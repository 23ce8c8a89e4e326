/** A place on a strip's paper: seconds before its right edge. */
export interface Place<E> {
  entry: E;
  ago: number;
}

export interface PointerActions<P extends Place<unknown>> {
  agoAt(target: Node, clientX: number): P | null;
  read(place: P | null): void;
  drag(stretch: { fromAgo: number; toAgo: number } | null): void;
  zoom(fromAgo: number, toAgo: number): void;
  live(): void;
}

/** A drag shorter than this many CSS pixels is a click. */
const LEAST_DRAG = 6;

/** Reads under the pointer, marks a stretch while it is dragged, and returns to live at a double click. */
export function listenForPointer<P extends Place<unknown>>(
  root: HTMLElement,
  actions: PointerActions<P>,
): void {
  let began: { x: number; place: P; target: Element } | null = null;
  root.addEventListener('pointermove', (event) => {
    const target = began?.target ?? (event.target as Element);
    const place = actions.agoAt(target, event.clientX);
    if (began !== null && place !== null && Math.abs(event.clientX - began.x) >= LEAST_DRAG) {
      actions.drag({
        fromAgo: Math.max(place.ago, began.place.ago),
        toAgo: Math.min(place.ago, began.place.ago),
      });
    } else if (began === null || place === null) actions.read(place);
  });
  root.addEventListener('pointerdown', (event) => {
    if (event.button !== 0 || event.pointerType === 'touch') return;
    const target = event.target as Element;
    const place = actions.agoAt(target, event.clientX);
    if (place === null) return;
    began = { x: event.clientX, place, target };
    target.setPointerCapture(event.pointerId);
  });
  const end = (event: PointerEvent) => {
    if (began === null) return;
    const place = actions.agoAt(began.target, event.clientX);
    const far = Math.abs(event.clientX - began.x) >= LEAST_DRAG;
    const first = began.place;
    began = null;
    actions.drag(null);
    if (event.type === 'pointerup' && far && place !== null)
      actions.zoom(Math.max(place.ago, first.ago), Math.min(place.ago, first.ago));
  };
  root.addEventListener('pointerup', end);
  root.addEventListener('pointercancel', end);
  root.addEventListener('pointerleave', () => {
    if (began === null) actions.read(null);
  });
  root.addEventListener('dblclick', (event) => {
    if (actions.agoAt(event.target as Element, event.clientX) !== null) actions.live();
  });
}
