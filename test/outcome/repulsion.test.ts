import { describe, expect, it } from "vitest";
import { forecast } from "../../src/outcome/forecast.ts";
import { planFromResult } from "../../src/outcome/plan.ts";
import { analysed, codesOf, type Keys, pull, recorded } from "./recordings.ts";

const DIPOLAR = { layer_distance: "0.65 nm", temperature: "30 K", density: "2e11 cm^-2" };

function pushed(beta: number, changes: Keys = {}, seed = 1) {
  return recorded(
    {
      recording: { photons: 1e5 },
      motion: { repulsion: beta },
      sample: DIPOLAR,
      ...changes,
    },
    seed,
  );
}

describe("dipolar excitons that repel each other", () => {
  const { stack, truth } = pushed(1);
  const { result } = analysed(stack);
  const { field, quantities, verdict } = result;

  it("give D of few excitons, L, τ and β of the truth from the whole stack", () => {
    expect(field?.preferred).toBe("repulsion");
    const { diffusion_coefficient: d, lifetime, diffusion_length: length } = quantities;
    expect([d.from, lifetime?.from, length?.from]).toEqual(["field", "field", "field"]);
    expect(Math.abs(pull(d, truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(3);
    expect(Math.abs(pull(lifetime!, truth.lifetime_ns))).toBeLessThan(3);
    expect(Math.abs(pull(length!, truth.diffusion_length_um))).toBeLessThan(3);
    const beta = field!.repulsion!;
    expect(Math.abs(pull({ value: beta.value, u: beta.u! }, 1))).toBeLessThan(3);
    // the widths alone are off by a tenth, far beyond their error bar
    expect(pull(result.transport.models.line!.parameters.D!, 0.02)).toBeGreaterThan(20);
  });

  it("say what energy that is: β·k_BT, 2.585 meV at 30 K, and u₀ by the stated density of 2000 µm⁻²", () => {
    const { repulsion, u0_n0, u0 } = field!;
    expect(u0_n0!.value / repulsion!.value).toBeCloseTo(2.5852, 4);
    expect(u0!.value).toBeCloseTo(u0_n0!.value / 2, 10);
  });

  it("are not called sound, and the widths' claim is named", () => {
    expect(verdict.level).toBe("caution");
    expect(codesOf(result)).toContain("widths-would-mislead");
    expect(codesOf(result)).toContain("repulsion-suspected");
    expect(codesOf(result)).not.toContain("annihilation-suspected");
  });

  it("are fitted with plain diffusion where they do not repel each other, the line's D standing", () => {
    const plain = analysed(pushed(0).stack).result;
    expect(plain.field?.preferred).toBe("diffusion");
    expect(plain.field?.repulsion).toBe(null);
    expect(plain.quantities.diffusion_coefficient.from).toBe("line");
    expect(plain.verdict.level).toBe("sound");
  });

  it("that annihilate each other too give D, L, τ, β and k·n₀ of the truth all the same", () => {
    const both = pushed(1, { life: { lifetime: "5 ns", annihilation: "0.3 /ns" } });
    const { result: mixed } = analysed(both.stack);
    expect(mixed.field?.preferred).toBe("annihilation_and_repulsion");
    const { diffusion_coefficient: d, lifetime, diffusion_length: length } = mixed.quantities;
    expect(Math.abs(pull(d, both.truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(3);
    expect(Math.abs(pull(length!, both.truth.diffusion_length_um))).toBeLessThan(3);
    expect(Math.abs(pull(lifetime!, both.truth.lifetime_ns))).toBeLessThan(3);
    for (const [found, truth] of [
      [mixed.field!.repulsion!, 1],
      [mixed.field!.k_n0!, 0.3],
    ] as const) {
      expect(Math.abs(found.value - truth) / found.u!).toBeLessThan(3);
    }
    expect(mixed.verdict.level).toBe("caution");
    expect(codesOf(mixed)).toContain("annihilation-suspected");
    expect(codesOf(mixed)).toContain("repulsion-suspected");
  });

  it("make a pilot whose forecast keeps β, and the errors of D, τ and β that its own counting gave", () => {
    const again = planFromResult(JSON.stringify(result), "result.json", {});
    const { diffusion_coefficient: d, lifetime, repulsion: beta } = forecast(again).quantities;
    expect(beta!.value).toBeCloseTo(field!.repulsion!.value, 6);
    expect(Math.abs(beta!.u / field!.repulsion!.u! - 1)).toBeLessThan(0.05);
    expect(Math.abs(d.u / quantities.diffusion_coefficient.u_statistical - 1)).toBeLessThan(0.05);
    expect(Math.abs(lifetime.u / quantities.lifetime!.u_statistical - 1)).toBeLessThan(0.05);
  });

  it("without a fit of the whole stack are never sound: how much ΔE/4k_BT may hide is said", () => {
    const told = pushed(0, { sample: { ...DIPOLAR, blue_shift: "4 meV", permittivity: "7" } });
    const { result: alone } = analysed(told.stack, { field: "never" });
    expect(alone.verdict.level).toBe("caution");
    // 4 meV over 4 × 2.585 meV
    expect(alone.verdict.reasons.find(({ code }) => code === "repulsion-not-tested")?.text).toContain("39 %");
  });
});

describe("repulsion that nobody told of", () => {
  it("is not called sound where D is off by more than its error bar, faint as the flat top may be", () => {
    const bright = { recording: { photons: 3e5 }, sample: { name: "Alder" } };
    const { result } = analysed(pushed(0.1, bright).stack, { field: "never" });
    expect(pull(result.quantities.diffusion_coefficient, 0.2)).toBeGreaterThan(4);
    expect(result.verdict.level).not.toBe("sound");
    expect(analysed(pushed(0, bright).stack).result.verdict.level).toBe("sound");
  });

  it("is seen by a flat top and motion that dies out while the light falls as one exponential", () => {
    const { stack } = pushed(1, { sample: { name: "Alder" } });
    const { result } = analysed(stack, { field: "never" });
    expect(result.verdict.level).not.toBe("sound");
    expect(codesOf(result)).toContain("repulsion-suspected");
    expect(codesOf(result)).not.toContain("annihilation-suspected");
    expect(analysed(stack).result.field?.candidates.map(({ name }) => name)).not.toContain("repulsion");
  });
});
