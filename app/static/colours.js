// Colours of fields: ramps of even steps in lightness, so that they read in grey too.

// Stops in OKLab: lightness, green-red, blue-yellow.
const RAMPS = {
  magnitude: [[0.22, 0.0, -0.08], [0.38, -0.03, -0.12], [0.53, -0.09, -0.06], [0.67, -0.09, 0.05], [0.81, -0.02, 0.14], [0.95, 0.0, 0.06]],
  signed: [[0.35, -0.03, -0.14], [0.62, -0.04, -0.09], [0.93, 0.0, 0.0], [0.66, 0.09, 0.08], [0.4, 0.14, 0.07]],
};
const STEPS = 256;

// RGBA bytes of a ramp, 256 colours one after the other.
export function ramp(name) {
  const stops = RAMPS[name];
  const bytes = new Uint8Array(4 * STEPS);
  for (let k = 0; k < STEPS; k += 1) {
    const at = (k / (STEPS - 1)) * (stops.length - 1);
    const below = Math.min(stops.length - 2, Math.floor(at));
    const lab = stops[below].map((value, n) => value + (at - below) * (stops[below + 1][n] - value));
    bytes.set([...rgb(lab), 255], 4 * k);
  }
  return bytes;
}

// OKLab to sRGB: B. Ottosson, "A perceptual color space for image processing" (2020).
function rgb([lightness, a, b]) {
  const l = (lightness + 0.3963377774 * a + 0.2158037573 * b) ** 3;
  const m = (lightness - 0.1055613458 * a - 0.0638541728 * b) ** 3;
  const s = (lightness - 0.0894841775 * a - 1.291485548 * b) ** 3;
  return [
    4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s,
    -1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s,
    -0.0041960863 * l - 0.7034186147 * m + 1.707614701 * s,
  ].map((linear) => {
    const value = Math.min(1, Math.max(0, linear));
    return Math.round(255 * (value <= 0.0031308 ? 12.92 * value : 1.055 * value ** (1 / 2.4) - 0.055));
  });
}
