import { InputFault } from "./fault.ts";
import type { SettingText } from "./settings.ts";

/** What OME-XML says of a recording, as far as it is used here. */
export interface ImageMetadata {
  /** Settings by dotted key, as the acquisition file would write them. */
  readonly settings: Readonly<Record<string, SettingText>>;
  /** Pictures that the metadata counts, SizeC·SizeZ·SizeT; null where it does not. */
  readonly pictures: number | null;
  /** Why the pixel size is not used, where the metadata contradicts itself. */
  readonly pixelFault: string | null;
}

type Attributes = Readonly<Record<string, unknown>>;

/**
 * Reads OME-XML (OME model 2016-06, ome.xsd: lengths default to µm, TimeIncrement to s) from an ImageDescription.
 *
 * @returns null when the description is not OME-XML
 * @throws InputFault when the metadata names several channels, or depths besides times
 */
export async function readOme(file: string, description: string): Promise<ImageMetadata | null> {
  if (!/<(?:\w+:)?OME[\s>]/.test(description)) return null;
  const pixels = await parsePixels(description);
  if (pixels === null) return null;
  const size = (key: string) => positive(pixels[key]);
  const [channels, depths, times] = [size("SizeC"), size("SizeZ"), size("SizeT")];
  if ((channels ?? 1) > 1 || ((depths ?? 1) > 1 && (times ?? 1) > 1)) {
    throw new InputFault(
      `${file} holds several channels or depths besides time; save the one channel to analyse as a stack of frames`,
      { file },
    );
  }
  const settings: Record<string, SettingText> = {};
  const pixelFault = addPixel(pixels, settings);
  const step = positive(pixels.TimeIncrement);
  if (step !== null) settings["time.step"] = `${step} ${text(pixels.TimeIncrementUnit) ?? "s"}`;
  const counted = depths !== null && times !== null;
  return { settings, pictures: counted ? depths * times * (channels ?? 1) : null, pixelFault };
}

/** A page of another size across and down needs an answer that the metadata cannot give. */
function addPixel(pixels: Attributes, settings: Record<string, SettingText>): string | null {
  const x = positive(pixels.PhysicalSizeX);
  const y = positive(pixels.PhysicalSizeY);
  if (x === null) return null;
  const unitX = text(pixels.PhysicalSizeXUnit) ?? "µm";
  const unitY = text(pixels.PhysicalSizeYUnit) ?? "µm";
  if (y !== null && (x !== y || unitX !== unitY)) {
    return `its metadata gives pixels of ${x} ${unitX} × ${y} ${unitY}, and only square pixels are analysed`;
  }
  // An OME pixel counted in pixels says nothing about the sample.
  if (unitX !== "pixel" && unitX !== "reference frame") settings["space.pixel"] = `${x} ${unitX}`;
  return null;
}

async function parsePixels(xml: string): Promise<Attributes | null> {
  const { XMLParser } = await import("fast-xml-parser");
  const parser = new XMLParser({ ignoreAttributes: false, attributeNamePrefix: "", removeNSPrefix: true });
  let tree: unknown;
  try {
    tree = parser.parse(xml);
  } catch {
    return null;
  }
  const image = firstOf(child(child(tree, "OME"), "Image"));
  const pixels = firstOf(child(image, "Pixels"));
  return isRecord(pixels) ? pixels : null;
}

function isRecord(value: unknown): value is Attributes {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

function child(node: unknown, name: string): unknown {
  return isRecord(node) ? node[name] : undefined;
}

function firstOf(node: unknown): unknown {
  return Array.isArray(node) ? node[0] : node;
}

function positive(value: unknown): number | null {
  const number = typeof value === "string" ? Number(value) : Number.NaN;
  return number > 0 && Number.isFinite(number) ? number : null;
}

function text(value: unknown): string | null {
  return typeof value === "string" && value.trim() !== "" ? value.trim() : null;
}
