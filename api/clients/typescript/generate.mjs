// Writes src/operations.ts from the contract: method and path of every operation
// below /v1, by its identifier.
import { readFileSync } from "node:fs";

const contract = JSON.parse(readFileSync(process.argv[2], "utf8"));
const lines = [];
for (const [path, item] of Object.entries(contract.paths)) {
  if (!path.startsWith("/v1/")) continue;
  for (const method of ["get", "post", "delete"]) {
    if (item[method]) lines.push(`  ${item[method].operationId}: { method: ${JSON.stringify(method.toUpperCase())}, path: ${JSON.stringify(path)} },`);
  }
}
process.stdout.write(`// Written by api/clients/generate; not edited by hand.
export const contractVersion = ${JSON.stringify(contract.info.version)};

export const routes = {
${lines.join("\n")}
} as const;
`);
