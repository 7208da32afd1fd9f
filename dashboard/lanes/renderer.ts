/**
 * Chooses how Pixi draws. WebGL on a real GPU; without one, Pixi's canvas renderer, which on such machines is several
 * times faster than WebGL computed in software.
 */
// Code made at run time would break the page's security policy; this part of Pixi does without.
import "pixi.js/unsafe-eval";
import { autoDetectRenderer, type Renderer } from "pixi.js";

export type RendererName = "canvas" | "webgl";

/** Names by which software rasterisers report themselves (Mesa llvmpipe and softpipe, SwiftShader, Microsoft's basic one). */
const SOFTWARE = /swiftshader|llvmpipe|softpipe|software|basic render/i;

export async function createRenderer(
  wanted: string | null,
): Promise<{ renderer: Renderer; name: RendererName }> {
  const name: RendererName =
    wanted === "canvas" || wanted === "webgl" ? wanted : hasGpu() ? "webgl" : "canvas";
  const renderer = await autoDetectRenderer({
    preference: name,
    backgroundAlpha: 0,
    antialias: true,
    autoDensity: true,
    resolution: Math.min(devicePixelRatio, name === "webgl" ? 2 : 1.5),
  });
  return { renderer, name };
}

function hasGpu(): boolean {
  const gl = document.createElement("canvas").getContext("webgl2");
  if (gl === null) return false;
  const info = gl.getExtension("WEBGL_debug_renderer_info");
  const described = String(gl.getParameter(info ? info.UNMASKED_RENDERER_WEBGL : gl.RENDERER));
  gl.getExtension("WEBGL_lose_context")?.loseContext();
  return !SOFTWARE.test(described);
}
