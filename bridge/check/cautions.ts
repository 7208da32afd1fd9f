/** What the check cannot know, said where it belongs: with the verdict, and with the steps that could be misread. */
import type { CheckStepName } from "../wire/check.ts";

export type BodyKind = "animal" | "dummy" | "foil";

/** With every verdict. */
export function verdictCautions(body: BodyKind): readonly string[] {
  const animal =
    "A go verdict is about sensors, never about an animal's condition: that is for the approved animal-care protocol and the attending veterinarian.";
  return [...(body === "animal" ? [animal] : []), "Bendwatch is no safety system."];
}

/** With a step, in front of what to do. */
export function stepCautions(step: CheckStepName, body: BodyKind): readonly string[] {
  const moved = step === "turn-through" || step === "bend" || step === "range";
  if (moved && body === "animal") {
    return [
      "Handle an animal only as the approved protocol allows: a step that it does not allow stays open, and the veterinarian decides.",
    ];
  }
  if (moved) return ["Moving drives: guards and emergency stop per the machine's own documentation."];
  if (step === "supply") {
    return [
      "Water and mains: isolated low-voltage supplies and residual-current protection, per local code and by licensed people.",
    ];
  }
  return [];
}
