import { createRandom } from "../../src/numerics/random.ts";
import { mutateBytes, mutateText } from "./mutate.ts";
import { type TiffFile, type TiffLayout, writeTiff } from "./tiff-file.ts";

const [SIZE, FRAMES] = [24, 12];

/** The whole, undamaged acquisition file that belongs to every undamaged stack below. */
export const WHOLE_TOML = `# a gated stack
axes = "TYX"
[space]
pixel = "0.100 um ± 1 %"
calibration = "objective-50x"
[time]
first = "0 ns"
step = "0.5 ns"
gate = "0.5 ns"
uncertainty = "0.5 %"
[detector]
offset = 100
gain = 2.0
read_noise = 1.5
excess_noise = 1.0
saturation = 65535
[excitation]
period = "250 ns"
[sample]
name = "Alder"
spot = "3"
temperature = "295 K ± 2 K"
emission_order = 1
[conditions]
fluence = "5 uJ/cm^2"
bath = "second"
`;

const LAYOUTS: readonly Partial<TiffLayout>[] = [
  {},
  { littleEndian: false },
  { rowsPerStrip: 5 },
  { bits: 32, format: 3 },
  { compression: 8 },
  { bits: 32, format: 1 },
];

/** A spreading, fading spot with Poisson noise, in counts of the detector of {@link WHOLE_TOML}. */
function spotFrames(): number[][] {
  const random = createRandom(20);
  return Array.from({ length: FRAMES }, (_, t) => {
    const variance = 9 + 1.5 * t;
    const peak = (4000 * Math.exp(-t / 8)) / variance;
    return Array.from({ length: SIZE * SIZE }, (_, i) => {
      const [x, y] = [(i % SIZE) - SIZE / 2, Math.floor(i / SIZE) - SIZE / 2];
      const light = peak * Math.exp(-(x * x + y * y) / (2 * variance)) + 0.5;
      return Math.round(100 + 2 * random.poisson(light) + 1.5 * random.normal());
    });
  });
}

/** Undamaged stacks, one for each layout. */
export const WHOLE_TIFFS: readonly TiffFile[] = LAYOUTS.map((layout) =>
  writeTiff(spotFrames(), {
    littleEndian: true,
    bits: 16,
    format: 1,
    width: SIZE,
    height: SIZE,
    rowsPerStrip: SIZE,
    compression: 1,
    ...layout,
  }),
);

export type Case =
  | { readonly kind: "tiff"; readonly bytes: Buffer; readonly whole: TiffFile }
  | { readonly kind: "toml"; readonly text: string };

/** Case number `index` of the endless list: even ones damage a TIFF, odd ones an acquisition file. */
export function fuzzCase(index: number): Case {
  if (index % 2 === 1) return { kind: "toml", text: mutateText(WHOLE_TOML, index) };
  const whole = WHOLE_TIFFS[(index / 2) % WHOLE_TIFFS.length] as TiffFile;
  return { kind: "tiff", bytes: mutateBytes(whole.bytes, index), whole };
}
