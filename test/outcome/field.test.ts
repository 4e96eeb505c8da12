import { describe, expect, it } from "vitest";
import { renderTerminal } from "../../src/report/terminal.ts";
import { analysed, recorded } from "./recordings.ts";

const pull = (q: { value: number; u: number | null } | null, truth: number): number =>
  (q?.u ?? null) === null ? Number.NaN : (q!.value - truth) / q!.u!;

describe("the whole-stack fit in the main job", () => {
  const annihilating = recorded({
    recording: { photons: 1e5 },
    life: { lifetime: "5 ns", annihilation: "0.8 /ns" },
  });

  it("takes the headline where excitons annihilate, and says what the widths would have claimed", () => {
    const { result } = analysed(annihilating.stack);
    const { diffusion_coefficient: d, lifetime, diffusion_length: length } = result.quantities;
    expect([d.from, lifetime?.from, length?.from]).toEqual(["field", "field", "field"]);
    expect(result.verdict.level).toBe("caution");
    const codes = result.verdict.reasons.map(({ code }) => code);
    expect(codes).toContain("widths-would-mislead");
    expect(codes).toContain("annihilation-suspected");
    expect(Math.abs(pull(d, annihilating.truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(3.5);
    expect(Math.abs(pull(length, annihilating.truth.diffusion_length_um))).toBeLessThan(3.5);
    expect(Math.abs(pull(lifetime, annihilating.truth.lifetime_ns))).toBeLessThan(3.5);
    expect(Math.abs(pull(result.field?.k_n0 ?? null, 0.8))).toBeLessThan(3.5);
  });

  it("is left out with field: never, and the widths' numbers are then not called sound", () => {
    const { result } = analysed(annihilating.stack, { field: "never" });
    expect(result.field).toBe(null);
    expect(result.quantities.diffusion_coefficient.from).not.toBe("field");
    expect(result.verdict.level).not.toBe("sound");
  });

  it("finds the free excitons' D and L where traps catch them", () => {
    const { stack, truth } = recorded({
      recording: { photons: 1e5 },
      life: { lifetime: "5 ns", capture: "0.2 /ns", trap_light: 1, trap_lifetime: "20 ns" },
    });
    const { result } = analysed(stack);
    expect(result.field?.preferred).toBe("capture");
    expect(
      Math.abs(pull(result.quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(3.5);
    expect(Math.abs(pull(result.quantities.diffusion_length, truth.diffusion_length_um))).toBeLessThan(3.5);
    expect(result.verdict.reasons.map(({ code }) => code)).toContain("traps-suspected");
  });

  it("gives a limit where traps hold longer than the recording can tell, and says so", () => {
    const { stack, truth } = recorded({
      life: { lifetime: "5 ns", capture: "0.2 /ns", trap_light: 1, trap_lifetime: "500 ns" },
    });
    const analysis = analysed(stack);
    const { field, quantities, verdict } = analysis.result;
    expect(field?.preferred).toBe("capture");
    expect(quantities.diffusion_coefficient.from).toBe("field");
    expect(
      Math.abs(pull(quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(3.5);
    const [low, high] = field?.trap_lifetime?.interval95 ?? [null, null];
    expect(field?.trap_lifetime?.u).toBe(null);
    expect(low).toBeLessThan(500);
    expect(low).toBeGreaterThan(50);
    expect(high).toBe(null);
    const open = "the lifetime in traps is not determined from above";
    expect(verdict.reasons.find(({ code }) => code === "parameters-not-told-apart")?.text).toContain(open);
    expect(renderTerminal(analysis, { colour: false }).replace(/\s+/g, " ")).toContain(open);
  });

  it("stands beside the widths on a plain recording where it is asked for", () => {
    const { stack } = recorded();
    const { result } = analysed(stack, { field: "always" });
    expect(result.quantities.diffusion_coefficient.from).toBe("line");
    expect(result.verdict.level).toBe("sound");
    expect(result.field?.preferred).toBe("diffusion");
    expect(result.field?.adopted).toBe(false);
    const d = result.quantities.diffusion_coefficient;
    expect(Math.abs((result.field?.D.value ?? 0) - d.value)).toBeLessThan(3 * d.u);
  });

  it("is not made where light stands for pairs", () => {
    const { stack } = recorded({}, 1, (a) => ({ ...a, sample: { ...a.sample, emissionOrder: 2 } }));
    expect(analysed(stack, { field: "always" }).result.field).toBe(null);
  });
});
