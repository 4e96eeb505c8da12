import { existsSync } from "node:fs";
import { dirname, isAbsolute, join } from "node:path";
import type { Response } from "./acquisition.ts";
import { readAcquisitionText } from "./acquisition-file.ts";
import { buildAcquisition, tomlName } from "./build-acquisition.ts";
import { checkFrameCount } from "./delays.ts";
import { InputFault } from "./fault.ts";
import { fileSource, inflate, readTextFile, sha256Of } from "./file-source.ts";
import { frameCheck, refuseStill } from "./frame-checks.ts";
import { type ImageMetadata, readOme } from "./ome.ts";
import { layOut, layOutUnstated, type Recording } from "./recording.ts";
import { readResponse } from "./response-file.ts";
import { mergeSettings, type WrittenSettings } from "./settings.ts";
import type { Stack } from "./stack.ts";
import { damaged } from "./tiff/directory.ts";
import { openTiff, type Pictures } from "./tiff/read.ts";
import type { ByteSource } from "./tiff/source.ts";
import { originName, textOf } from "./values.ts";

/** What may be said about a recording besides its own files. */
export interface OpenOptions {
  /** Path of the acquisition file; default NAME.toml beside NAME.tif, where there is one. */
  readonly acquisition?: string;
  /** "TYX", "TX" or "XT", over what the acquisition file says. */
  readonly axes?: string;
  /** Settings by dotted key ("space.pixel": "0.13 um"), over what the acquisition file says. */
  readonly overrides?: Readonly<Record<string, string>>;
  /** SHA-256 of the file where it is taken elsewhere, beside the analysis; default: taken here. */
  readonly sha256?: string;
}

/** A recording with what is written about it, before anything is asked of either. */
export interface RawStack extends Recording {
  readonly file: string;
  /** "uint16", "float32", … */
  readonly sampleType: string;
  /** Counts at which samples of this type end; null where no camera reaches it. */
  readonly largest: number | null;
  readonly settings: WrittenSettings;
  readonly source: ByteSource;
}

/**
 * Opens a recording as it is stored. Needs no acquisition file: a single picture without axes is laid out as "YX".
 * @throws InputFault when the image or, where there is one, the acquisition file cannot be read
 */
export async function openRaw(path: string, options: OpenOptions = {}): Promise<RawStack> {
  return open(path, options, true);
}

/**
 * Opens a recording for analysis: its frames, its acquisition, its dark frame and response, all checked.
 *
 * Frames are read from the file one by one as they are asked for, each pixel checked on the way.
 * @param path a TIFF: one page a frame, or a single page for a streak trace
 * @throws InputFault when anything in the files or the options is wrong or missing
 */
export async function openStack(path: string, options: OpenOptions = {}): Promise<Stack> {
  const raw = await open(path, options, false);
  const { kind, frames, height, width, settings } = raw;
  checkFrameCount(path, frames);
  const acquisition = buildAcquisition(settings, frames, sampledResponse(settings), raw.largest);
  const dark = await darkFrame(settings, raw);
  const unsigned = raw.sampleType.startsWith("uint");
  const check = frameCheck(path, kind, width, acquisition.detector, dark, unsigned);
  refuseStill(path, raw);
  return {
    kind,
    frames,
    height,
    width,
    read(index, into) {
      raw.read(index, into);
      check(into, index);
    },
    dark,
    acquisition,
    source: { file: path, sha256: options.sha256 ?? sha256Of(raw.source), shape: raw.shape, axes: raw.axes },
  };
}

async function open(path: string, options: OpenOptions, unstatedAllowed: boolean): Promise<RawStack> {
  const source = fileSource(path);
  const pictures = await openTiff(source, inflate);
  const metadata = await readOme(path, pictures.description);
  if (
    metadata?.pictures !== undefined &&
    metadata.pictures !== null &&
    metadata.pictures !== pictures.count
  ) {
    throw damaged(source, `its metadata counts ${metadata.pictures} pictures, it holds ${pictures.count}`);
  }
  const settings = writtenSettings(path, options, metadata);
  const axes = textOf(settings, "axes");
  const statedIn = originName(settings, settings.values.get("axes"));
  const recording =
    axes === null && unstatedAllowed ? layOutUnstated(pictures) : layOut(path, pictures, axes, statedIn);
  return {
    ...recording,
    file: path,
    sampleType: pictures.sampleType,
    largest: pictures.largest,
    settings,
    source,
  };
}

function writtenSettings(
  path: string,
  options: OpenOptions,
  metadata: ImageMetadata | null,
): WrittenSettings {
  const file = acquisitionPath(path, options.acquisition);
  const axes = options.axes === undefined ? {} : { axes: options.axes };
  return mergeSettings({
    image: path,
    metadata: metadata?.settings,
    pixelFault: metadata?.pixelFault,
    file: file === null ? undefined : { name: file, settings: readAcquisitionText(readTextFile(file), file) },
    overrides: { ...options.overrides, ...axes },
  });
}

function acquisitionPath(path: string, stated: string | undefined): string | null {
  if (stated !== undefined) return stated;
  const beside = tomlName(path);
  return beside !== path && existsSync(beside) ? beside : null;
}

/** A path in the acquisition file starts at that file; one on the command line at the working directory. */
function companionPath(settings: WrittenSettings, key: string): string | null {
  const text = textOf(settings, key);
  if (text === null) return null;
  const { acquisitionFile, values } = settings;
  const fromFile = values.get(key)?.from === "acquisition file" && acquisitionFile !== null;
  return fromFile && !isAbsolute(text) ? join(dirname(acquisitionFile), text) : text;
}

function sampledResponse(settings: WrittenSettings): Response | null {
  const path = companionPath(settings, "instrument.response");
  return path === null ? null : readResponse(readTextFile(path), path);
}

/** The mean of all pictures of the dark file, which the constant offset gives way to. */
async function darkFrame(settings: WrittenSettings, raw: RawStack): Promise<Float64Array | null> {
  const path = companionPath(settings, "detector.dark");
  if (path === null) return null;
  const pictures = await openTiff(fileSource(path), inflate);
  const [height, width] = raw.shape.slice(-2) as [number, number];
  if (pictures.height !== height || pictures.width !== width) {
    throw new InputFault(
      `${path} is a dark frame of ${pictures.width} × ${pictures.height} pixels where ${raw.file} has ${width} × ${height}; ` +
        "record it with the same region of the camera",
      { file: path, where: "detector.dark" },
    );
  }
  return darkAsFrame(raw, meanPicture(path, pictures));
}

function meanPicture(path: string, pictures: Pictures): Float64Array {
  const sum = new Float64Array(pictures.height * pictures.width);
  const one = new Float64Array(sum.length);
  for (let index = 0; index < pictures.count; index++) {
    pictures.read(index, one);
    for (let i = 0; i < sum.length; i++) sum[i] = sum[i]! + one[i]! / pictures.count;
  }
  if (!sum.every(Number.isFinite)) {
    throw new InputFault(`${path} holds a pixel that is no finite number; record the dark frame again`, {
      file: path,
      where: "detector.dark",
    });
  }
  return sum;
}

/** A trace has one dark line for all times: the mean over time of the dark picture. */
function darkAsFrame(raw: RawStack, picture: Float64Array): Float64Array {
  if (raw.axes === "TYX") return picture;
  const line = new Float64Array(raw.width);
  for (let i = 0; i < picture.length; i++) {
    const x = raw.axes === "TX" ? i % raw.width : Math.floor(i / raw.frames);
    line[x] = line[x]! + picture[i]! / raw.frames;
  }
  return line;
}
