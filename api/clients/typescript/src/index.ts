export { Client, type Answer, type Body, type Job, type Operation, type Settings, type With } from "./client.js";
export { ProblemError, type Fault, type Problem } from "./problem.js";
export { contractVersion } from "./operations.js";
export type { components, operations } from "./contract.js";
