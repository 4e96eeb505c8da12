import type { Shape } from "./viewer-cut.ts";
import type { ViewerData } from "./viewer-data.ts";

/**
 * Drawn over a map, in units of its cells: the ellipse of one standard deviation of the spot, and where a length is
 * given, a bar of it. Its text is put into the page, so it must hold everything it needs.
 * @param spot N, x, y, Σxx, Σxy, Σyy, B as in a spot, µm
 * @param bar µm
 */
export function overlayShapes(
  spot: readonly number[] | null,
  { region, pixel }: Pick<ViewerData, "region" | "pixel">,
  bar: number | null,
): Shape[] {
  const { columns, rows, bin, left, top } = region;
  const unit = bin * pixel;
  const shapes: Shape[] = [];
  if (spot !== null) {
    const [, cx = 0, cy = 0, xx = 0, xy = 0, yy = 0] = spot;
    const turn = 0.5 * Math.atan2(2 * xy, xx - yy);
    const half = Math.hypot((xx - yy) / 2, xy);
    const x = (cx / pixel + 0.5 - left) / bin;
    const y = (cy / pixel + 0.5 - top) / bin;
    const transform = `translate(${x} ${y}) rotate(${(turn * 180) / Math.PI})`;
    const rx = Math.sqrt((xx + yy) / 2 + half) / unit;
    const ry = Math.sqrt(Math.max(0, (xx + yy) / 2 - half)) / unit;
    shapes.push(["ellipse", { rx, ry, transform, class: "outline" }]);
  }
  if (bar !== null) {
    const [x, y] = [0.05 * columns, 0.94 * rows];
    shapes.push(["line", { x1: x, x2: x + bar / unit, y1: y, y2: y, class: "bar" }]);
  }
  return shapes;
}
