// Runs the client against the server that RAILPROOF_URL names.
import assert from "node:assert/strict";
import { test } from "node:test";
import { Client, ProblemError, contractVersion, type Body, type Job } from "../src/index.js";

const client = new Client(process.env["RAILPROOF_URL"] ?? "", { pollMs: 50 });

test("losses of an example", async () => {
  const answer = await client.call("losses", await client.example("buoy-5v0", "losses"));
  assert.equal(answer.status, "ok");
  assert.equal(answer.engine.contract_version, contractVersion);
  const efficiency = answer.items?.[0]?.quantities?.efficiency_ratio;
  assert.ok(typeof efficiency === "number" && efficiency > 0.5 && efficiency < 1);
});

test("a draft stage is posted on", async () => {
  const sized = await client.call("sizing", await client.example("mast-12v0", "sizing"));
  assert.ok(sized.stage && sized.point);
  const answer = await client.call("losses", { stage: sized.stage, point: sized.point });
  assert.equal(answer.status, "ok");
});

test("a refusal points at its fields", async () => {
  const request = await client.example("buoy-5v0", "losses");
  request.stage.inductor.inductance_h = -1;
  await assert.rejects(client.call("losses", request), (e: unknown) => {
    assert.ok(e instanceof ProblemError);
    assert.equal(e.status, 422);
    assert.equal(e.kind, "schema");
    assert.deepEqual(e.pointers, ["/stage/inductor/inductance_h"]);
    return true;
  });
});

test("types refuse what the contract refuses", () => {
  // @ts-expect-error a frequency is a number or a spread
  const wrong: Pick<Body<"losses">["stage"], "switching_frequency_hz"> = { switching_frequency_hz: "fast" };
  assert.equal(typeof wrong.switching_frequency_hz, "string");
});

test("pictures and tables", async () => {
  const svg = await client.form("image/svg+xml", "steadyState", await client.example("mast-12v0", "steadyState"));
  assert.match(await svg.text(), /<svg/);
  const table = await client.form("text/csv", "losses", await client.example("buoy-5v0", "losses"));
  assert.match(await table.text(), /power_w/);
});

test("query and path", async () => {
  const request = await client.example("buoy-5v0", "losses");
  const plain = JSON.stringify(await client.call("losses", request));
  const explained = JSON.stringify(await client.call("losses", request, { query: { explain: true } }));
  assert.ok(explained.length > plain.length);
  await assert.rejects(client.call("getJob", { path: { id: "job_unknown" } }), (e: unknown) => e instanceof ProblemError && e.status === 404);
});

test("a job gives the answer of the call", async () => {
  const request = await client.example("buoy-5v0", "corners");
  const seen: Job[] = [];
  const answer = await client.job("corners", request, (job) => seen.push(job));
  assert.deepEqual(answer, await client.call("corners", request));
  assert.equal(seen.at(-1)?.state, "done");
});
