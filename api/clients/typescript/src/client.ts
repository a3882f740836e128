import type { components, operations } from "./contract.js";
import { routes } from "./operations.js";
import { ProblemError, type Problem } from "./problem.js";

/** An operation of the contract. */
export type Operation = keyof operations & keyof typeof routes;

type Json<T> = T extends { content: { "application/json": infer V } } ? V : never;

/** The document that an operation takes; never where it takes none. */
export type Body<Id extends Operation> = operations[Id] extends { requestBody: infer R } ? Json<R> : never;

/** The JSON value that an operation answers. */
export type Answer<Id extends Operation> = operations[Id] extends { responses: { 200: infer R } } ? Json<R> : never;

type Query<Id extends Operation> = operations[Id]["parameters"] extends { query?: infer Q } ? NonNullable<Q> : never;
type InPath<Id extends Operation> = operations[Id]["parameters"] extends { path: infer P } ? P : never;

/** What a call may carry besides its document. */
export type With<Id extends Operation> = {
  query?: Query<Id>;
  signal?: AbortSignal;
} & ([InPath<Id>] extends [never] ? object : { path: InPath<Id> });

type Arguments<Id extends Operation> = [Body<Id>] extends [never]
  ? [InPath<Id>] extends [never] ? [more?: With<Id>] : [more: With<Id>]
  : [body: Body<Id>, more?: With<Id>];

export type Job = components["schemas"]["Job"];

export interface Settings {
  /** Sent as a bearer token, where the server asks for one. */
  key?: string;
  /** How often a job is looked at, in milliseconds. */
  pollMs?: number;
}

interface Message {
  accept?: string;
  body?: unknown;
  path?: Record<string, string>;
  query?: Record<string, unknown>;
  prefer?: string;
  signal?: AbortSignal | undefined;
}

/** Talks to one server. */
export class Client {
  constructor(readonly baseUrl: string, private readonly settings: Settings = {}) {}

  /** Calls an operation and returns its JSON answer; a refusal is thrown as ProblemError. */
  async call<Id extends Operation>(id: Id, ...given: Arguments<Id>): Promise<Answer<Id>> {
    const response = await this.send(id, this.message(id, given));
    return (await response.json()) as Answer<Id>;
  }

  /** The answer of an operation in another form: image/svg+xml, image/png, text/csv or text/html. */
  async form<Id extends Operation>(media: string, id: Id, ...given: Arguments<Id>): Promise<Blob> {
    return (await this.send(id, { ...this.message(id, given), accept: media })).blob();
  }

  /** Hands long work over as a job and waits for its answer; onProgress sees every look at the job. */
  async job<Id extends Operation>(id: Id, body: Body<Id>, onProgress?: (job: Job) => void, signal?: AbortSignal): Promise<Answer<Id>> {
    const response = await this.send(id, { body, prefer: "respond-async", signal });
    if (response.status !== 202) return (await response.json()) as Answer<Id>;
    let job = (await response.json()) as Job;
    while (job.state === "waiting" || job.state === "running") {
      onProgress?.(job);
      await new Promise((done) => setTimeout(done, this.settings.pollMs ?? 500));
      job = (await (await this.send("getJob", { path: { id: job.id }, signal })).json()) as Job;
    }
    onProgress?.(job);
    if (job.state === "failed" && job.problem) throw new ProblemError(job.problem);
    if (job.state !== "done" || job.result_id === undefined) throw new Error(`job ${job.id} is ${job.state}`);
    return (await (await this.send("getResult", { path: { id: job.result_id }, signal })).json()) as Answer<Id>;
  }

  /** A complete example request, such as example("buoy-5v0", "losses"). */
  async example<Id extends Operation>(rail: string, id: Id): Promise<Body<Id>> {
    const name = routes[id].path.split("/").pop();
    const response = await fetch(`${this.baseUrl}/examples/${rail}/${name}.json`);
    return (await accepted(response)).json() as Promise<Body<Id>>;
  }

  private message<Id extends Operation>(id: Id, given: readonly unknown[]): Message {
    const takesBody = routes[id].method === "POST";
    const more = (takesBody ? given[1] : given[0]) as Omit<Message, "body"> | undefined;
    return takesBody ? { ...more, body: given[0] } : { ...more };
  }

  private async send(id: Operation, message: Message): Promise<Response> {
    const { method, path } = routes[id];
    let address: string = path;
    for (const [name, value] of Object.entries(message.path ?? {})) address = address.replace(`{${name}}`, encodeURIComponent(value));
    const query = new URLSearchParams();
    for (const [name, value] of Object.entries(message.query ?? {})) if (value !== undefined) query.set(name, String(value));
    if (query.size > 0) address += `?${query}`;
    const headers = new Headers({ Accept: message.accept ?? "application/json" });
    if (message.body !== undefined) headers.set("Content-Type", "application/json");
    if (message.prefer) headers.set("Prefer", message.prefer);
    if (this.settings.key) headers.set("Authorization", `Bearer ${this.settings.key}`);
    return accepted(await fetch(this.baseUrl + address, {
      method,
      headers,
      body: message.body === undefined ? null : JSON.stringify(message.body),
      signal: message.signal ?? null,
    }));
  }
}

async function accepted(response: Response): Promise<Response> {
  if (response.ok) return response;
  const kind = response.headers.get("Content-Type") ?? "";
  if (!kind.startsWith("application/problem+json")) throw new Error(`${response.url}: status ${response.status} without a problem document`);
  throw new ProblemError((await response.json()) as Problem);
}
