/**
 * Each vehicle's own mark: a shape and a colour, by its place in the fleet. Eight shapes and colours;
 * the ninth vehicle and on have the same ones hollow, so that sixteen differ in black and white too.
 */

const SHAPES = 8;

/** Polygons about zero within ±1, y down. */
const POLYGONS: readonly (readonly (readonly [number, number])[])[] = [
  Array.from(
    { length: 20 },
    (_, corner) =>
      [0.95 * Math.cos((2 * Math.PI * corner) / 20), 0.95 * Math.sin((2 * Math.PI * corner) / 20)] as const,
  ),
  [
    [-0.85, -0.85],
    [0.85, -0.85],
    [0.85, 0.85],
    [-0.85, 0.85],
  ],
  [
    [0, -1.1],
    [1.05, 0.8],
    [-1.05, 0.8],
  ],
  [
    [0, -1.25],
    [1.05, 0],
    [0, 1.25],
    [-1.05, 0],
  ],
  [
    [-0.4, -1.1],
    [0.4, -1.1],
    [0.4, -0.4],
    [1.1, -0.4],
    [1.1, 0.4],
    [0.4, 0.4],
    [0.4, 1.1],
    [-0.4, 1.1],
    [-0.4, 0.4],
    [-1.1, 0.4],
    [-1.1, -0.4],
    [-0.4, -0.4],
  ],
  [
    [-1.05, -0.8],
    [1.05, -0.8],
    [0, 1.1],
  ],
  [
    [-1.15, -0.45],
    [1.15, -0.45],
    [1.15, 0.45],
    [-1.15, 0.45],
  ],
  [
    [-0.95, -1],
    [0.95, -1],
    [0.25, 0],
    [0.95, 1],
    [-0.95, 1],
    [-0.25, 0],
  ],
];

export interface Mark {
  /** A colour by name of its token, for light and dark. */
  readonly colour: string;
  readonly isHollow: boolean;
  /** As the plots draw it: `size` is the area in square pixels. */
  readonly symbol: { draw(context: Pen, size: number): void };
  /** The outline as the `d` of a path, `radius` pixels about zero. */
  path(radius: number): string;
}

interface Pen {
  moveTo(x: number, y: number): void;
  lineTo(x: number, y: number): void;
  closePath(): void;
}

/** The mark of the vehicle at a place in the fleet, 0 to 15. */
export function markOf(index: number): Mark {
  const polygon = POLYGONS[index % SHAPES]!;
  return {
    colour: `var(--vehicle-${index % SHAPES})`,
    isHollow: index >= SHAPES,
    symbol: {
      draw(context, size) {
        const radius = Math.sqrt(size) / 2;
        polygon.forEach(([x, y], corner) => {
          if (corner === 0) context.moveTo(x * radius, y * radius);
          else context.lineTo(x * radius, y * radius);
        });
        context.closePath();
      },
    },
    path: (radius) =>
      `M${polygon.map(([x, y]) => `${(x * radius).toFixed(1)},${(y * radius).toFixed(1)}`).join('L')}Z`,
  };
}

/** The mark as a small picture in a line of text. */
export function markPicture(index: number): string {
  const mark = markOf(index);
  const fill = mark.isHollow ? 'var(--paper)' : mark.colour;
  return (
    '<svg class="mark" viewBox="-8 -8 16 16" aria-hidden="true">' +
    `<path d="${mark.path(5)}" fill="${fill}" stroke="${mark.colour}" stroke-width="1.6"/></svg>`
  );
}
