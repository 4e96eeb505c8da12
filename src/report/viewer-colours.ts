/**
 * The viewer's two colour ramps, 256 RGBA colours each: light from dark to bright, and residuals from blue through
 * white to orange. Its text is put into the page, so it must hold everything it needs.
 */
export function colourRamps(): { light: Uint8ClampedArray; residual: Uint8ClampedArray } {
  // lightness rises evenly along the first ramp and falls evenly to both sides of the second, so that they are read
  // by lightness alone where hues cannot be told apart; both stay inside sRGB, or they would kink where they are cut
  const light = ramp((s) => [0.16 + 0.81 * s, 0.03 + 0.1 * Math.sin(Math.PI * s ** 0.8), 280 + 175 * s]);
  const residual = ramp((s) => {
    const far = Math.abs(2 * s - 1);
    return [0.97 - 0.47 * far, 0.003 + 0.115 * far, s < 0.5 ? 250 : 50];
  });
  return { light, residual };

  /** 256 colours along a path in OKLCh (lightness, chroma, hue in degrees), as RGBA bytes. */
  function ramp(path: (s: number) => [number, number, number]): Uint8ClampedArray {
    const colours = new Uint8ClampedArray(1024);
    for (let i = 0; i < 256; i++) {
      const [lightness, chroma, hue] = path(i / 255);
      colours.set([...toRgb(lightness, chroma, (hue * Math.PI) / 180), 255], 4 * i);
    }
    return colours;
  }

  /** OKLab (B. Ottosson, 2020) to sRGB bytes; constants as published with it, from memory. */
  function toRgb(lightness: number, chroma: number, hue: number): number[] {
    const a = chroma * Math.cos(hue);
    const b = chroma * Math.sin(hue);
    const l = (lightness + 0.3963377774 * a + 0.2158037573 * b) ** 3;
    const m = (lightness - 0.1055613458 * a - 0.0638541728 * b) ** 3;
    const s = (lightness - 0.0894841775 * a - 1.291485548 * b) ** 3;
    const linear = [
      4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s,
      -1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s,
      -0.0041960863 * l - 0.7034186147 * m + 1.707614701 * s,
    ];
    return linear.map((c) => 255 * (c <= 0.0031308 ? 12.92 * c : 1.055 * c ** (1 / 2.4) - 0.055));
  }
}
