/** Keys, mouse and touch of the strip. Single letters act only while the strip has the focus (WCAG 2.1.4). */

const QUARTER_MS = 900_000;
const HOUR_MS = 3_600_000;

export interface ReadingMoves {
  moveBy(ms: number): void;
  /** Null goes back to following the pen. */
  moveTo(atMs: number | null): void;
  toggleTable(): void;
  edges(): { readonly startMs: number; readonly endMs: number } | null;
  /** The instant at a pixel of the paper. */
  atMs(x: number): number;
}

export function listenForReading(roll: HTMLElement, moves: ReadingMoves): void {
  const keys: Readonly<Record<string, (event: KeyboardEvent) => void>> = {
    ArrowLeft: (event) => moves.moveBy(event.shiftKey ? -HOUR_MS : -QUARTER_MS),
    ArrowRight: (event) => moves.moveBy(event.shiftKey ? HOUR_MS : QUARTER_MS),
    ArrowDown: () => moves.moveBy(-QUARTER_MS),
    ArrowUp: () => moves.moveBy(QUARTER_MS),
    PageDown: () => moves.moveBy(-HOUR_MS),
    PageUp: () => moves.moveBy(HOUR_MS),
    Home: () => moves.moveTo(moves.edges()?.startMs ?? null),
    End: () => moves.moveTo(moves.edges()?.endMs ?? null),
    n: () => moves.moveTo(null),
    t: () => moves.toggleTable(),
  };
  roll.addEventListener('keydown', (event) => {
    const act = event.ctrlKey || event.metaKey || event.altKey ? undefined : keys[event.key];
    if (!act) return;
    event.preventDefault();
    act(event);
  });
  const follow = (event: MouseEvent): void => {
    moves.moveTo(moves.atMs(event.clientX - roll.getBoundingClientRect().left + roll.scrollLeft));
  };
  // A finger that drags rolls the paper; a finger that taps reads.
  roll.addEventListener('pointermove', (event) => {
    if (event.pointerType === 'mouse') follow(event);
  });
  roll.addEventListener('click', follow);
}
