import { type Camera, panned, turned, zoomed } from './camera.ts';

/** What the drawing's mouse and keys act on. */
export interface InputTarget {
  camera(): Camera;
  home(): Camera;
  move(camera: Camera): void;
  /** Place in CSS pixels from the canvas's top left corner. */
  pick(x: number, y: number): void;
  deselect(): void;
}

const TURN = Math.PI / 36;
const STEP = 0.05;
const ZOOM = 0.87;
/** A press that moves farther than this many pixels is a drag, not a click. */
const CLICK = 4;

/** Camera after a key, or null where the key is none of the camera's. */
export function cameraAfterKey(camera: Camera, key: string, shift: boolean): Camera | null {
  switch (key) {
    case 'ArrowLeft':
      return shift ? panned(camera, STEP, 0) : turned(camera, -TURN, 0);
    case 'ArrowRight':
      return shift ? panned(camera, -STEP, 0) : turned(camera, TURN, 0);
    case 'ArrowUp':
      return shift ? panned(camera, 0, -STEP) : turned(camera, 0, TURN);
    case 'ArrowDown':
      return shift ? panned(camera, 0, STEP) : turned(camera, 0, -TURN);
    case '+':
    case '=':
      return zoomed(camera, ZOOM);
    case '-':
    case '_':
      return zoomed(camera, 1 / ZOOM);
    case 'x':
      return { ...camera, azimuth: 0, elevation: 0 };
    case 'y':
      return { ...camera, azimuth: -Math.PI / 2, elevation: 0 };
    case 'z':
      return { ...camera, azimuth: -Math.PI / 2, elevation: Math.PI / 2 - 1e-3 };
    default:
      return null;
  }
}

/** Binds mouse, touch and keys of the canvas. */
export function bindInput(canvas: HTMLCanvasElement, target: InputTarget): void {
  let held: { x: number; y: number; moves: boolean } | null = null;
  let dragged = 0;
  canvas.addEventListener('pointerdown', (event) => {
    canvas.setPointerCapture(event.pointerId);
    held = { x: event.clientX, y: event.clientY, moves: event.button !== 0 || event.shiftKey };
    dragged = 0;
  });
  canvas.addEventListener('pointermove', (event) => {
    if (held === null) return;
    const dx = event.clientX - held.x;
    const dy = event.clientY - held.y;
    dragged += Math.abs(dx) + Math.abs(dy);
    if (dragged <= CLICK) return;
    held.x = event.clientX;
    held.y = event.clientY;
    const high = canvas.clientHeight;
    const camera = target.camera();
    target.move(
      held.moves ? panned(camera, dx / high, -dy / high) : turned(camera, (-3.2 * dx) / high, (3.2 * dy) / high),
    );
  });
  canvas.addEventListener('pointerup', (event) => {
    if (held !== null && dragged <= CLICK && event.button === 0) {
      const box = canvas.getBoundingClientRect();
      target.pick(event.clientX - box.left, event.clientY - box.top);
    }
    held = null;
  });
  canvas.addEventListener('pointercancel', () => {
    held = null;
  });
  canvas.addEventListener('contextmenu', (event) => event.preventDefault());
  canvas.addEventListener(
    'wheel',
    (event) => {
      event.preventDefault();
      const lines = event.deltaMode === 0 ? event.deltaY / 100 : event.deltaY / 3;
      target.move(zoomed(target.camera(), Math.exp(0.16 * Math.max(-3, Math.min(3, lines)))));
    },
    { passive: false },
  );
  canvas.addEventListener('keydown', (event) => {
    if (event.ctrlKey || event.altKey || event.metaKey) return;
    if (event.key === 'Escape') target.deselect();
    else if (event.key === 'Enter') target.pick(canvas.clientWidth / 2, canvas.clientHeight / 2);
    else {
      const home = event.key === 'Home';
      const camera = home ? target.home() : cameraAfterKey(target.camera(), event.key, event.shiftKey);
      if (camera === null) return;
      target.move(camera);
    }
    event.preventDefault();
  });
}
