import { colourRamps } from "./viewer-colours.ts";
import { cutShapes, shortNumber } from "./viewer-cut.ts";
import type { Viewer, ViewerData } from "./viewer-data.ts";
import { modelCells, residualCells, wholeModelCells } from "./viewer-model.ts";
import { overlayShapes } from "./viewer-overlay.ts";
import { frameViewer, type Tools } from "./viewer-script.ts";
import { inGroups, residualSum } from "./viewer-sum.ts";
import { counted } from "./wording.ts";

const TOOLS: Tools = {
  colourRamps,
  modelCells,
  wholeModelCells,
  residualCells,
  residualSum,
  inGroups,
  cutShapes,
  shortNumber,
  overlayShapes,
};

/** The frame viewer's part of the page: a static figure of three cuts, and the viewer itself where scripts run. */
export function viewerHtml({ data, cells, wholeCells }: Viewer, profiles: string): string {
  return `<section aria-labelledby="frames" class="${data.kind}">
<h2 id="frames">Frame by frame</h2>
<noscript><p>The frame viewer needs scripts; the cuts below and the table of frames show the same data.</p></noscript>
<div id="viewer" hidden>
${controls(data)}
<div class="maps frame-maps">
${screen("map", "Recorded", ramp("light", "photons per pixel"))}
${screen("model", `<span id="model-name">Model</span>`, `<p class="soft" id="scale-bar"></p>`)}
${screen("residual", "Residual", `<div class="ramp"><span>−4</span><canvas id="residual-bar" aria-hidden="true"></canvas><span>4</span><span>standard deviations; orange: more light than the model</span></div>`)}
</div>
<div class="beside">
${cut("cut-x", data.kind === "map" ? "Cut along x, mean of a ±σ strip, photons per pixel" : "This frame's line, photons per pixel")}
${data.kind === "map" ? cut("cut-y", "Cut along y, mean of a ±σ strip, photons per pixel") : ""}
<div><table><caption>Numbers of this frame</caption><tbody id="frame-numbers"></tbody></table></div>
</div>
${sums(data)}
</div>
<figure>${profiles}<figcaption>First, middle and last frame used: recorded light across the spot, its own fit, and the first frame's fit for comparison.</figcaption></figure>
<script type="application/json" id="viewer-data">${scriptSafe(JSON.stringify(data))}</script>
<script type="application/octet-stream" id="viewer-cells">${cells}</script>
${data.whole === null ? "" : `<script type="application/octet-stream" id="viewer-whole">${wholeCells}</script>\n`}<script>
(${frameViewer})({ ${Object.entries(TOOLS)
    .map(([name, tool]) => `${name}: ${tool}`)
    .join(", ")} }).catch(() => {
  const note = document.createElement("p");
  note.textContent = "This browser cannot show the frame viewer; the cuts below and the table of frames show the same data.";
  document.getElementById("viewer").replaceWith(note);
});
addEventListener("beforeprint", () => { for (const part of document.querySelectorAll("details")) part.open = true; });
</script>
</section>`;
}

function controls(data: ViewerData): string {
  const last = data.frames.length - 1;
  return `<div class="controls">
<label class="wide" for="frame">${counted(data.frames.length, "frame")}${data.stride > 1 ? ` (one in ${data.stride} of the recording)` : ""}: drag, or use the arrow keys</label>
<button type="button" id="frame-back" aria-label="Previous frame">‹</button>
<input type="range" id="frame" min="0" max="${last}" step="1" value="${data.first}">
<button type="button" id="frame-on" aria-label="Next frame">›</button>
<label class="wide"><input type="checkbox" id="same-scale"${data.kind === "trace" ? " checked disabled" : ""}> Same light scale for all frames</label>
${modelChoice(data)}<p class="live" id="frame-text" aria-live="polite"></p>
</div>`;
}

/** Which model is shown: the whole stack's first where the headline comes from it. */
function modelChoice({ whole }: ViewerData): string {
  if (whole === null) return "";
  const choice = (id: string, text: string, chosen: boolean) =>
    `<label><input type="radio" name="model" id="model-${id}"${chosen ? " checked" : ""}> ${text}</label>`;
  return `<fieldset class="choice"><legend>Model</legend>
${choice("spot", "each frame's spot", !whole.adopted)}
${choice("whole", `whole stack (${whole.name})`, whole.adopted)}
</fieldset>
`;
}

function screen(id: string, title: string, below: string): string {
  return `<figure><figcaption>${title}</figcaption><div class="screen"><canvas id="${id}" role="img"></canvas><svg id="${id}-over" aria-hidden="true"></svg></div>${below}</figure>`;
}

/** What the model leaves over in many frames together. */
function sums({ kind }: ViewerData): string {
  const titles = kind === "map" ? ["Early", "Middle", "Late"] : ["All delays, downwards"];
  const figures = titles.map(
    (title, i) =>
      `<figure id="sum-${i}-figure"><figcaption>${title}<span class="soft" id="sum-${i}-text"></span><span class="soft" id="sum-${i}-rms"></span></figcaption><div class="screen"><canvas id="sum-${i}" role="img"></canvas></div></figure>`,
  );
  const signs =
    kind === "map"
      ? " A ring says that the spot has another shape, two halves that it has moved, a lump that something else shines."
      : "";
  return `<h3>What the model leaves over</h3>
<p class="soft">Residuals of frames and neighbouring cells added up, in standard deviations, colours as above. Where the model is right only chance is left: no pattern, and an rms near 1.${signs}</p>
<div class="maps sums">
${figures.join("\n")}
</div>`;
}

function ramp(id: string, unit: string): string {
  return `<div class="ramp"><span id="${id}-low"></span><canvas id="${id}-bar" aria-hidden="true"></canvas><span id="${id}-high"></span><span>${unit}</span></div>`;
}

function cut(id: string, caption: string): string {
  return `<figure><svg id="${id}" class="cut" role="img" aria-label="${caption}"></svg><figcaption>${caption}</figcaption></figure>`;
}

/** JSON inside a script element must not be able to close it. */
function scriptSafe(json: string): string {
  return json.replaceAll("<", "\\u003c");
}
