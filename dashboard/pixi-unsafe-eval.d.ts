/** Pixi ships this part without types; importing it is all there is to it. */
declare module "pixi.js/unsafe-eval";
