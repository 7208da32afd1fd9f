/**
 * Chooses how the lanes are drawn. WebGL on a GPU; the plain canvas where WebGL is missing or computed by the processor:
 * there it draws several times fewer frames than the canvas does.
 */
import "pixi.js/unsafe-eval";
import "pixi.js/graphics";
import { autoDetectRenderer, type Renderer } from "pixi.js";

export type RendererName = "canvas" | "webgl";

/** Names under which browsers report WebGL without a GPU. */
const SOFTWARE = /swiftshader|llvmpipe|softpipe|software|basic render/i;

/** @param asked by the page's address ("canvas" or "webgl"), else null */
export function chooseRenderer(asked: string | null): RendererName {
  if (asked === "canvas" || asked === "webgl") return asked;
  const context = document.createElement("canvas").getContext("webgl2");
  if (context === null) return "canvas";
  const info = context.getExtension("WEBGL_debug_renderer_info");
  const name = String(context.getParameter(info?.UNMASKED_RENDERER_WEBGL ?? context.RENDERER));
  context.getExtension("WEBGL_lose_context")?.loseContext();
  return SOFTWARE.test(name) ? "canvas" : "webgl";
}

/** Device pixels a CSS pixel; more than two cannot be seen and cost time. */
export function screenResolution(): number {
  return Math.min(2, devicePixelRatio);
}

export async function createRenderer(name: RendererName): Promise<Renderer> {
  return autoDetectRenderer({
    preference: [name],
    manageImports: false,
    backgroundAlpha: 0,
    antialias: true,
    autoDensity: true,
    resolution: screenResolution(),
    hello: false,
  });
}
