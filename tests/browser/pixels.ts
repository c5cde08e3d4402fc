import type { Page } from 'playwright-core';

/**
 * Where a drawing has a colour of the style sheet furthest to the right, in the drawing's own pixels.
 * @param colour  its name in the style sheet, such as `--chosen`
 */
export async function placeOfColour(
  page: Page,
  canvas: string,
  colour: string,
): Promise<{ x: number; y: number }> {
  const place = await page.waitForFunction(`(() => {
    const canvas = document.querySelector(${JSON.stringify(canvas)});
    if (canvas === null || canvas.width === 0) return null;
    const style = getComputedStyle(document.documentElement);
    const hex = style.getPropertyValue(${JSON.stringify(colour)}).trim();
    const [r, g, b] = [1, 3, 5].map((at) => Number.parseInt(hex.slice(at, at + 2), 16));
    const { width, height } = canvas;
    const copy = document.createElement('canvas');
    Object.assign(copy, { width, height });
    const drawing = copy.getContext('2d', { willReadFrequently: true });
    drawing.drawImage(canvas, 0, 0);
    const { data } = drawing.getImageData(0, 0, width, height);
    const scale = canvas.clientWidth / width;
    for (let x = width - 1; x >= 0; x -= 1) {
      for (let y = 0; y < height; y += 1) {
        const at = 4 * (y * width + x);
        if (data[at] === r && data[at + 1] === g && data[at + 2] === b && data[at + 3] === 255) {
          return { x: x * scale, y: y * scale };
        }
      }
    }
    return null;
  })()`);
  return (await place.jsonValue()) as { x: number; y: number };
}
