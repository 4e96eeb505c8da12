import { areaY, dot, frame, line, lineY, plot, ruleY, text } from "@observablehq/plot";
import { DOMImplementation, XMLSerializer } from "@xmldom/xmldom";
import type { Drawing } from "./figure-parts.ts";

const document = new DOMImplementation().createDocument("http://www.w3.org/1999/xhtml", "html");
const serializer = new XMLSerializer();

/** What the figures are drawn with in Node: an XML document gives the plotting library all that it asks of a page's. */
export const drawing: Drawing = {
  plot: { areaY, dot, frame, line, lineY, plot, ruleY, text },
  document: document as unknown as Document,
  serialize: (node) => serializer.serializeToString(node as never),
};
