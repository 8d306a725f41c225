import ContribCanvas from 'blessed-contrib/lib/widget/canvas.js';
import type { BlessedScreen } from './blessed.js';
import type { Raster } from './raster.js';

interface Coordinates {
  readonly xi: number;
  readonly xl: number;
  readonly yi: number;
  readonly yl: number;
}

interface CanvasElement {
  readonly screen: BlessedScreen;
  _noFill: boolean;
  _render(): Coordinates | undefined;
  calcSize(): void;
  canvasSize: { width: number; height: number };
}

const Canvas = ContribCanvas as new (options: object, store: unknown) => CanvasElement;

/** What the widget asks of a pixel store. Ours is the raster, which views draw into directly. */
class RasterStore {
  constructor(
    readonly width: number,
    readonly height: number,
  ) {}
  clear(): void {
    // the raster is cleared by the frame
  }
  frame(): string {
    return '';
  }
  measureText(text: string): { width: number } {
    return { width: text.length };
  }
}

/**
 * blessed-contrib's canvas over the whole screen, with a raster as its pixel store: cells are written where they changed,
 * and no string of escape sequences is built and parsed again.
 */
export class RasterCanvas extends Canvas {
  /** @param paint draws the frame into the raster, which has the size of the screen */
  constructor(
    screen: BlessedScreen,
    private readonly raster: Raster,
    private readonly paint: () => void,
  ) {
    super({ screen, top: 0, left: 0, width: '100%', height: '100%', mouse: true }, RasterStore);
    this._noFill = true;
  }

  /** Puts the canvas on its screen. */
  attach(): void {
    this.screen.append(this as never);
  }

  override calcSize(): void {
    this.canvasSize = { width: 2, height: 4 };
  }

  render(): Coordinates | undefined {
    const place = this._render();
    if (!place) return place;
    const width = place.xl - place.xi;
    const height = place.yl - place.yi;
    this.raster.resize(width, height);
    this.paint();
    for (let y = 0, i = 0; y < height; y++) {
      const line = this.screen.lines[place.yi + y];
      for (let x = 0; x < width; x++, i++) {
        const cell = line?.[place.xi + x];
        if (!line || !cell) continue;
        const character = this.raster.glyph(i);
        const attributes = this.raster.attributesAt(i);
        if (cell[0] === attributes && cell[1] === character) continue;
        cell[0] = attributes;
        cell[1] = character;
        line.dirty = true;
      }
    }
    return place;
  }
}
