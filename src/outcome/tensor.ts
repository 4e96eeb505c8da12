import { propagateTogether } from "../numerics/propagate.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import type { LineFit } from "../transport/line.ts";
import { meanDiffusion } from "../transport/line.ts";
import type { Result } from "./result.ts";

/**
 * The diffusion tensor of a map, cm²/s, with its principal values and the angle of the larger one from the x axis
 * (−90° to 90°). Uncertainties by JCGM 100:2008, 5.2, from the line's covariance, pixel size and time base; the angle of
 * a nearly isotropic tensor is undetermined, which its uncertainty (at most 90°) then says.
 *
 * @param headline D as reported, cm²/s, half the tensor's trace: where another law than the line stands for D, the
 *   line gives the anisotropy alone
 */
export function tensorOf(
  line: LineFit,
  acquisition: Acquisition,
  birge: number,
  headline: number,
): Result["tensor"] {
  if (line.diffusion.length !== 3) return null;
  const scale = headline / meanDiffusion(line).value;
  const u = [3, 4, 5].map((i) => Math.sqrt(line.covariance[i * 6 + i]!));
  const { space, time } = acquisition;
  const inputs = [
    ...line.diffusion.map((value, i) => ({ value: scale * value, u: scale * birge * u[i]! })),
    { value: 1, u: space.pixel.u / space.pixel.value },
    { value: 1, u: time.relativeU },
  ];
  const n = inputs.length;
  const correlation = new Float64Array(n * n);
  for (let i = 0; i < 3; i++) {
    for (let j = 0; j < 3; j++)
      correlation[i * n + j] = line.covariance[(3 + i) * 6 + 3 + j]! / (u[i]! * u[j]!);
  }
  const calibrated = (value: number, x: readonly number[]): number => (value * x[3]! ** 2) / x[4]!;
  const half = (x: readonly number[]): number => Math.hypot((x[0]! - x[2]!) / 2, x[1]!);
  const { results } = propagateTogether(
    [
      (x) => calibrated(x[0]!, x),
      (x) => calibrated(x[1]!, x),
      (x) => calibrated(x[2]!, x),
      (x) => calibrated((x[0]! + x[2]!) / 2 + half(x), x),
      (x) => calibrated((x[0]! + x[2]!) / 2 - half(x), x),
      (x) => (90 / Math.PI) * Math.atan2(2 * x[1]!, x[0]! - x[2]!),
    ],
    inputs,
    correlation,
  );
  const [xx, xy, yy, major, minor, angle] = results.map((r) => ({ value: r.value, u: r.u }));
  const angleU = Number.isFinite(angle!.u) ? Math.min(angle!.u, 90) : 90;
  return {
    xx: xx!,
    xy: xy!,
    yy: yy!,
    major: major!,
    minor: minor!,
    angle_deg: { value: angle!.value, u: angleU },
  };
}
