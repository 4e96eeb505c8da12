import { createHash } from "node:crypto";
import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { InputFault } from "../../src/stack/fault.ts";
import { inspectStack } from "../../src/stack/inspect.ts";
import { openStack } from "../../src/stack/open.ts";
import { readResponse } from "../../src/stack/response-file.ts";
import { writeTiff } from "../../src/stack/tiff/write.ts";
import { counts, floats, LEAST_TOML, plainRecording, testFolder } from "./folder.ts";

const folder = testFolder();
const ZOO = new URL("../data/tiff-zoo/", import.meta.url).pathname;

function frameOf(
  stack: { height: number; width: number; read(i: number, into: Float64Array): void },
  index: number,
) {
  const frame = new Float64Array(stack.height * stack.width);
  stack.read(index, frame);
  return [...frame];
}

async function faultOf(opening: Promise<unknown>): Promise<InputFault> {
  const fault = await opening.then(
    () => null,
    (error: unknown) => error,
  );
  if (fault instanceof InputFault) return fault;
  throw fault ?? new Error("no fault was raised");
}

describe("opening a recording", () => {
  it("takes NAME.toml beside NAME.tif and gives frames in stored counts", async () => {
    const file = folder.put("scan.tif", plainRecording());
    folder.put("scan.toml", LEAST_TOML);
    const stack = await openStack(file);
    expect(stack).toMatchObject({ kind: "map", frames: 4, height: 6, width: 8, dark: null });
    expect(stack.acquisition.time.delays).toEqual([0, 0.5, 1, 1.5]);
    expect(stack.acquisition.detector.saturation).toBe(65535);
    expect(stack.acquisition.settings["detector.saturation"]?.from).toBe("default");
    expect(frameOf(stack, 2).slice(0, 10)).toEqual([20, 21, 22, 23, 24, 25, 26, 27, 22, 23]);
    expect(stack.source).toEqual({
      file,
      sha256: createHash("sha256").update(readFileSync(file)).digest("hex"),
      shape: [4, 6, 8],
      axes: "TYX",
    });
  });

  it("takes NAME.toml for NAME.ome.tif, and pixel and step from its metadata where that says nothing", async () => {
    const file = folder.put("cold.ome.tif", readFileSync(`${ZOO}ome.ome.tif`));
    folder.put("cold.toml", '[sample]\nname = "Alder"\n[time]\nfirst = "-1 ns"\n');
    const { acquisition } = await openStack(file);
    expect(acquisition.sample.name).toBe("Alder");
    // expected.json: PhysicalSizeX 0.13 µm, TimeIncrement 0.25 ns.
    expect(acquisition.space.pixel.value).toBeCloseTo(0.13, 12);
    expect(acquisition.time.delays.slice(0, 3)).toEqual([-1, -0.75, -0.5]);
    expect(acquisition.settings["space.pixel"]?.from).toBe("image metadata");
  });

  it("reads a trace with time along rows, and the same trace with time along columns", async () => {
    const rows = folder.put("rows.tif", writeTiff([counts(5, 4, (x, t) => 100 * t + x)]));
    const columns = folder.put("columns.tif", writeTiff([counts(4, 5, (t, x) => 100 * t + x)]));
    const acquisition = folder.put("trace.toml", LEAST_TOML);
    const tx = await openStack(rows, { acquisition, axes: "TX" });
    const xt = await openStack(columns, { acquisition, axes: "XT" });
    expect(tx).toMatchObject({ kind: "trace", frames: 4, height: 1, width: 5 });
    expect(tx.source).toMatchObject({ shape: [4, 5], axes: "TX" });
    expect(xt).toMatchObject({ kind: "trace", frames: 4, height: 1, width: 5 });
    expect(xt.source).toMatchObject({ shape: [5, 4], axes: "XT" });
    for (const stack of [tx, xt]) expect(frameOf(stack, 3)).toEqual([300, 301, 302, 303, 304]);
  });

  it("averages the dark file's frames, and the times of a trace's dark picture", async () => {
    const file = folder.put("lit.tif", writeTiff([0, 1, 2].map((k) => counts(2, 2, () => 200 + k))));
    folder.put("dark.tif", writeTiff([counts(2, 2, (x) => 90 + x), counts(2, 2, (x) => 92 + x)]));
    folder.put("lit.toml", `${LEAST_TOML}[detector]\ndark = "dark.tif"\n`);
    expect([...((await openStack(file)).dark ?? [])]).toEqual([91, 92, 91, 92]);
    const trace = folder.put("line.tif", writeTiff([counts(3, 4, (x, t) => 200 + x + t)]));
    folder.put("line-dark.tif", writeTiff([counts(3, 4, (x, t) => 90 + 10 * x + t)]));
    folder.put("line.toml", `axes = "TX"\n${LEAST_TOML}[detector]\ndark = "line-dark.tif"\n`);
    expect([...((await openStack(trace)).dark ?? [])]).toEqual([91.5, 101.5, 111.5]);
    const turned = folder.put("turned.tif", writeTiff([counts(4, 3, (t, x) => 200 + x + t)]));
    const dark = folder.put("turned-dark.tif", writeTiff([counts(4, 3, (t, x) => 90 + 10 * x + t)]));
    const overrides = { "space.pixel": "0.1 um", "time.step": "1 ns", "detector.dark": dark };
    const stack = await openStack(turned, { axes: "XT", overrides });
    expect([...(stack.dark ?? [])]).toEqual([91.5, 101.5, 111.5]);
  });

  it("reads the instrument response beside the acquisition file", async () => {
    const file = folder.put("fast.tif", plainRecording());
    folder.put("irf.csv", "delay (ns),counts\n-0.1,0\n0,100\n0.1,20\n");
    folder.put("fast.toml", `${LEAST_TOML}[instrument]\nresponse = "irf.csv"\n`);
    const { acquisition } = await openStack(file);
    expect(acquisition.response).toEqual({ kind: "sampled", delays: [-0.1, 0, 0.1], counts: [0, 100, 20] });
  });

  it("takes the unit of the delays from the heading of the response", () => {
    const body = "-100,0\n0,100\n100,20\n";
    for (const heading of ["delay (ps),counts", "time/ps,counts", "# made on Monday\nt_ps,counts"]) {
      const response = readResponse(`${heading}\n${body}`, "irf.csv");
      expect(response).toEqual({ kind: "sampled", delays: [-0.1, 0, 0.1], counts: [0, 100, 20] });
    }
    expect(readResponse(`delay,counts\n${body}`, "irf.csv")).toMatchObject({ delays: [-100, 0, 100] });
  });

  it("lets settings on the command line stand in for the whole acquisition file", async () => {
    const file = folder.put("bare.tif", plainRecording());
    const overrides = { "space.pixel": "130 nm", "time.delays": "0, 1, 2, 4", "time.unit": "ns" };
    const { acquisition } = await openStack(file, { overrides });
    expect(acquisition.space.pixel.value).toBeCloseTo(0.13, 12);
    expect(acquisition.time.delays).toEqual([0, 1, 2, 4]);
  });

  it("keeps negative numbers that read noise explains, and a few dead pixels", async () => {
    const noisy = [0, 1, 2].map((k) =>
      floats(20, 20, (x, y) => (x === 3 && y === 3 ? 0 : 100 + k + x - 1.5 * y)),
    );
    const file = folder.put("camera.tif", writeTiff(noisy));
    folder.put("camera.toml", `${LEAST_TOML}[detector]\noffset = 95\nread_noise = 6\n`);
    expect(frameOf(await openStack(file), 0)[63]).toBe(0);
    const low = folder.put("low.tif", writeTiff([0, 1, 2].map((k) => floats(4, 4, (x) => x - 20 + k))));
    folder.put("low.toml", `${LEAST_TOML}[detector]\nread_noise = 6\n`);
    expect(frameOf(await openStack(low), 0)[0]).toBe(-20);
  });
});

describe("bad input is refused in one sentence with file, cause and mend", () => {
  const toml = { acquisition: folder.put("least.toml", LEAST_TOML) };
  const recording = (...pictures: Parameters<typeof writeTiff>[0]) => writeTiff(pictures);
  const flat = (k: number) => counts(8, 6, (x) => 5 + k + x);

  it.each<[string, string, () => Uint8Array | string, RegExp]>([
    ["text under an image's name", "text.tif", () => "not an image at all", /is not a TIFF image/],
    ["an empty file", "empty.tif", () => "", /is empty \(0 bytes\)/],
    ["a file cut within a frame", "cut.tif", () => plainRecording().slice(0, 300), /is damaged or was cut/],
    [
      "a file cut before its last byte",
      "cut1.tif",
      () => plainRecording().slice(0, -1),
      /is damaged or was cut/,
    ],
    [
      "pages of two sizes",
      "sizes.tif",
      () =>
        recording(
          flat(0),
          counts(7, 6, (x) => x),
          flat(2),
        ),
      /page 2 has 7 × 6 pixels where page 1 has 8 × 6/,
    ],
    ["two frames", "two.tif", () => plainRecording(2), /holds 2 frames, and at least 3/],
    ["a single picture", "one.tif", () => plainRecording(1), /holds a single picture; .* state axes = "TX"/],
    ["equal frames", "equal.tif", () => recording(flat(0), flat(0), flat(0)), /all frames are equal/],
    [
      "nothing but zeros",
      "zero.tif",
      () => recording(...[0, 1, 2].map(() => counts(8, 6, () => 0))),
      /every pixel of every frame is zero/,
    ],
    [
      "one value everywhere",
      "same.tif",
      () => recording(...[0, 1, 2].map(() => counts(8, 6, () => 7))),
      /every pixel of every frame holds 7/,
    ],
  ])("%s", async (_, name, content, message) => {
    const file = folder.put(name, content());
    const fault = await faultOf(openStack(file, toml));
    expect(fault.message).toMatch(message);
    expect(fault.message).toContain(file);
    expect(fault.message).not.toContain("\n");
  });

  it.each<[string, (x: number, y: number) => number, RegExp]>([
    [
      "NaN",
      (x, y) => (x === 2 && y === 3 ? Number.NaN : 1 + x),
      /frame 2, pixel x = 2, y = 3, is not a number \(NaN\)/,
    ],
    [
      "infinity",
      (x, y) => (x === 0 && y === 1 ? Infinity : 1 + x),
      /frame 2, pixel x = 0, y = 1, is infinite/,
    ],
    [
      "minus infinity",
      (x, y) => (x === 0 && y === 1 ? -Infinity : 1 + x),
      /frame 2, pixel x = 0, y = 1, is infinite/,
    ],
    [
      "negative light",
      (x, y) => (x === 1 && y === 1 ? -3 : 1 + x),
      /holds -3, far below the dark level 0 .* state detector\.offset/,
    ],
  ])("a pixel of %s names frame and pixel", async (_, value, message) => {
    const good = (k: number) => floats(5, 4, (x) => 1 + k + x);
    const file = folder.put("pixel.tif", recording(good(0), floats(5, 4, value), good(2)));
    const stack = await openStack(file, toml);
    const fault = await faultOf(Promise.resolve().then(() => frameOf(stack, 1)));
    expect(fault.message).toMatch(message);
    expect(fault.where).toBe("frame 2");
  });

  it("an offset above most of the pixels", async () => {
    const file = folder.put("offset.tif", plainRecording());
    const stack = await openStack(file, { ...toml, overrides: { "detector.offset": "100" } });
    const fault = await faultOf(Promise.resolve().then(() => frameOf(stack, 0)));
    expect(fault.message).toMatch(/in frame 1, 100 % of the pixels lie below 100.*correct detector\.offset/);
  });

  it("a missing file, with the name that was probably meant", async () => {
    folder.put("alder-07.tif", plainRecording());
    const fault = await faultOf(openStack(`${folder.path}/alder_07.tif`));
    expect(fault.message).toMatch(/alder_07\.tif does not exist; did you mean .*alder-07\.tif\?/);
    expect((await faultOf(openStack("nowhere/scan.tif"))).message).toMatch(
      /the folder nowhere does not exist either/,
    );
  });

  it("a directory", async () => {
    expect((await faultOf(openStack(folder.path))).message).toMatch(/is a directory; give a file in it/);
  });

  it("a missing acquisition file that was asked for, or one that is no text", async () => {
    const file = folder.put("plain.tif", plainRecording());
    const missing = await faultOf(openStack(file, { acquisition: `${folder.path}/none.toml` }));
    expect(missing.message).toMatch(/none\.toml does not exist/);
    expect((await faultOf(openStack(file, { acquisition: file }))).message).toMatch(/is not a text file/);
  });

  it("axes that do not exist or do not fit", async () => {
    const file = folder.put("axes.tif", plainRecording());
    const one = folder.put("axes1.tif", plainRecording(1));
    expect((await faultOf(openStack(file, { ...toml, axes: "ZYX" }))).message).toMatch(
      /axes = "ZYX" is not known; write "TYX"/,
    );
    expect((await faultOf(openStack(file, { ...toml, axes: "TX" }))).message).toMatch(
      /is for a single picture; .* holds 4/,
    );
    expect((await faultOf(openStack(one, { ...toml, axes: "TYX" }))).message).toMatch(
      /needs several pictures/,
    );
  });

  it("a dark frame of another size, and a response that is none", async () => {
    const file = folder.put("parts.tif", plainRecording());
    const dark = folder.put("small-dark.tif", recording(counts(4, 4, () => 90)));
    const sized = await faultOf(openStack(file, { ...toml, overrides: { "detector.dark": dark } }));
    expect(sized.message).toMatch(/dark frame of 4 × 4 pixels where .* has 8 × 6/);
    for (const [text, message] of [
      ["delay,counts\n0,1\n0.1,x\n", /line 3, does not hold two numbers/],
      ["0,1\n0.1,2\n0.1,3\n", /line 3, has a delay that does not rise/],
      ["0,1\n0.1,-2\n0.2,3\n", /line 2, has counts below zero/],
      ["0;1\n0,1;2\n0,2;3\n", /line 2, does not hold two numbers/],
      ["0,1\n0,1,2\n0,2,3\n", /line 2, does not hold two numbers/],
      ["delay,counts\n", /holds no instrument response/],
    ] as const) {
      const response = folder.put("bad.csv", text);
      const fault = await faultOf(
        openStack(file, { ...toml, overrides: { "instrument.response": response } }),
      );
      expect(fault.message).toMatch(message);
    }
  });

  it("metadata that gives pixels of two sides, unless the pixel is stated", async () => {
    const xml =
      '<OME><Image><Pixels SizeX="8" SizeY="6" SizeC="1" SizeZ="1" SizeT="3" PhysicalSizeX="0.1" PhysicalSizeY="0.2"/></Image></OME>';
    const pictures = [0, 1, 2].map(flat);
    const file = folder.put("oblong.ome.tif", writeTiff(pictures, { description: xml }));
    const delays = { "time.step": "1 ns" };
    expect((await faultOf(openStack(file, { overrides: delays }))).message).toMatch(
      /pixels of 0\.1 µm × 0\.2 µm, and only square pixels are analysed; give the pixel size/,
    );
    const stated = await openStack(file, { overrides: { ...delays, "space.pixel": "0.1 um" } });
    expect(stated.acquisition.space.pixel.value).toBe(0.1);
  });

  it("metadata or description that count more pictures than there are", async () => {
    const xml = '<OME><Image><Pixels SizeC="1" SizeZ="1" SizeT="9"/></Image></OME>';
    const pictures = [0, 1, 2].map(flat);
    const file = folder.put("short.ome.tif", writeTiff(pictures, { description: xml }));
    expect((await faultOf(openStack(file, toml))).message).toMatch(/metadata counts 9 pictures, it holds 3/);
    const lines = folder.put("short.tif", writeTiff(pictures, { description: "images=5\n" }));
    expect((await faultOf(openStack(lines, toml))).message).toMatch(/speaks of 5 images, it holds 3/);
    const channels = folder.put(
      "channels.tif",
      writeTiff(pictures, { description: "images=3\nchannels=3\n" }),
    );
    expect((await faultOf(openStack(channels, toml))).message).toMatch(/several channels/);
  });
});

describe("inspecting a recording", () => {
  it("needs no acquisition file and gives stored values", async () => {
    const inspection = await inspectStack(`${ZOO}int16_negative.tif`);
    expect(inspection).toMatchObject({
      axes: "TYX",
      shape: [4, 20, 22],
      sample_type: "int16",
      sum: 2581920,
      min: -500,
      pixel_um: null,
      delays_ns: null,
      saturation: 32767,
    });
    expect(await inspectStack(`${ZOO}streak_u16.tif`)).toMatchObject({
      axes: "YX",
      shape: [120, 48],
      sum: 11064832,
    });
  });

  it("gives pixel and delays where they are written, and counts full pixels", async () => {
    const file = folder.put(
      "full.tif",
      writeTiff([0, 1, 2].map((k) => counts(4, 4, (x, y) => (x + y < k ? 65535 : 9)))),
    );
    folder.put("full.toml", LEAST_TOML);
    const inspection = await inspectStack(file);
    expect(inspection).toMatchObject({ pixel_um: 0.1, delays_ns: [0, 0.5, 1], max: 65535 });
    expect(inspection.frames.map((frame) => frame.full)).toEqual([0, 1, 3]);
  });
});
