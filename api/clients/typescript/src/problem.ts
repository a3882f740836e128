import type { components } from "./contract.js";

export type Problem = components["schemas"]["Problem"];
export type Fault = components["schemas"]["Fault"];

/** A refusal of the server: a problem document (RFC 9457) and the places it points at. */
export class ProblemError extends Error {
  override readonly name = "ProblemError";
  readonly faults: readonly Fault[];

  constructor(readonly problem: Problem) {
    super([`${problem.title} (${problem.status})`, problem.detail].filter(Boolean).join(": "));
    this.faults = problem.errors ?? [];
  }

  get status(): number {
    return this.problem.status;
  }

  /** The last part of the type, such as "schema" or "physics". */
  get kind(): string {
    return this.problem.type.split("/").pop() ?? "";
  }

  /** The JSON Pointers (RFC 6901) of all faults. */
  get pointers(): string[] {
    return this.faults.map((f) => f.pointer);
  }
}
