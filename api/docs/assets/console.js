// Sends requests to this server and shows what it answers.
"use strict";
document.addEventListener("DOMContentLoaded", () => {
  const $ = (id) => document.getElementById(id);
  const operations = JSON.parse($("operations").textContent);
  const carried = ["stage", "point", "conditions", "limits", "requirement"];
  const pollAfter = 500; // [ms]
  let running = null; // AbortController of the request under way
  let answered = null; // last JSON answer
  let contract = null; // for what it tells of parameters

  const operation = () => operations.find((o) => o.id === $("operation").value);
  const option = (value, text) => {
    const o = document.createElement("option");
    o.value = value;
    o.textContent = text;
    return o;
  };

  // ---- the request

  function address(op) {
    let path = op.path;
    const query = new URLSearchParams();
    for (const field of $("ask").querySelectorAll("[data-in]")) {
      if (field.dataset.in === "path") path = path.replace(`{${field.name}}`, encodeURIComponent(field.value));
      else if (field.value !== "") query.set(field.name, field.value);
    }
    const tail = query.toString();
    return path + (tail ? "?" + tail : "");
  }

  function headers(op) {
    const h = { Accept: $("form").value };
    if (op.body) h["Content-Type"] = "application/json";
    if (op.deferred && $("deferred").checked) h.Prefer = "respond-async";
    if ($("key").value) h.Authorization = "Bearer " + $("key").value;
    return h;
  }

  function showShell() {
    const op = operation();
    const quote = (s) => "'" + s.replace(/'/g, "'\\''") + "'";
    const parts = ["curl -s -X " + op.method, quote(location.origin + address(op))];
    for (const [name, value] of Object.entries(headers(op))) {
      parts.push("-H " + quote(name + ": " + (name === "Authorization" ? "Bearer YOUR-KEY" : value)));
    }
    if (op.body) parts.push("--data-binary @" + (op.example || "request.json"));
    $("shell").textContent = parts.join(" \\\n  ");
  }

  async function loadExample() {
    const op = operation();
    if (!op.body || !op.example) return;
    const path = `/examples/${$("rail").value}/${op.example}`;
    try {
      const r = await fetch(path);
      if (!r.ok) throw new Error("status " + r.status);
      $("body").value = await r.text();
      $("note").textContent = "";
    } catch (e) {
      $("note").textContent = `The example ${path} could not be loaded: ${e.message}`;
    }
  }

  // described returns what the contract tells of a parameter.
  function described(op, name) {
    const follow = (v) => (v.$ref ? v.$ref.slice(2).split("/").reduce((o, k) => o[k], contract) : v);
    const list = contract ? contract.paths[op.path][op.method.toLowerCase()].parameters || [] : [];
    return list.map(follow).find((p) => p.name === name) || { schema: {} };
  }

  function parameter(op, name, where) {
    const about = described(op, name);
    const label = document.createElement("label");
    const choices = about.schema.type === "boolean" ? ["true"] : about.schema.enum;
    const field = document.createElement(choices ? "select" : "input");
    field.id = "parameter-" + name;
    field.name = name;
    field.dataset.in = where;
    field.required = where === "path";
    field.title = about.description || "";
    if (choices) field.append(option("", "left out"), ...choices.map((c) => option(c, c)));
    else field.placeholder = where === "path" ? "needed" : about.description || "left out";
    field.addEventListener("input", showShell);
    label.htmlFor = field.id;
    label.textContent = name;
    return [label, field];
  }

  async function choose() {
    const op = operation();
    $("in-path").replaceChildren(...op.in_path.flatMap((n) => parameter(op, n, "path")));
    $("in-query").replaceChildren(...op.query.flatMap((n) => parameter(op, n, "query")));
    $("query-row").hidden = op.query.length === 0;
    $("form").replaceChildren(...op.forms.map((f) => option(f, f)));
    $("body-row").hidden = !op.body;
    $("example-row").hidden = !op.example;
    $("deferred-row").hidden = !op.deferred;
    history.replaceState(null, "", "#" + op.id);
    showShell();
    await loadExample();
  }

  // ---- the answer

  function say(text, kind) {
    $("state").textContent = text;
    $("state").className = kind || "";
  }

  function clear() {
    for (const id of ["progress", "faults", "onward", "headers-row"]) $(id).hidden = true;
    $("shown").replaceChildren();
    answered = null;
  }

  function preformatted(text) {
    const pre = document.createElement("pre");
    pre.tabIndex = 0;
    pre.textContent = text;
    return pre;
  }

  async function picture(blob) {
    const img = document.createElement("img");
    img.alt = "The answer as a picture";
    img.src = await new Promise((done, failed) => {
      const reader = new FileReader();
      reader.onload = () => done(reader.result);
      reader.onerror = () => failed(reader.error);
      reader.readAsDataURL(blob);
    });
    return img;
  }

  function page(text) {
    const frame = document.createElement("iframe");
    frame.title = "The answer as a page";
    frame.setAttribute("sandbox", "");
    frame.addEventListener("load", () => { frame.dataset.shown = "yes"; });
    frame.srcdoc = text;
    return frame;
  }

  function faults(problem) {
    const list = (problem.errors || []).map((f) => {
      const item = document.createElement("li");
      const go = document.createElement("button");
      go.type = "button";
      go.textContent = f.pointer || "(whole document)";
      go.addEventListener("click", () => show(f.pointer || ""));
      item.append(go, ` ${f.detail || ""}${f.received ? "; given " + f.received : ""}${f.limit ? "; accepted: " + f.limit : ""}${f.unit ? " [" + f.unit + "]" : ""}`);
      return item;
    });
    $("faults").replaceChildren(...list);
    $("faults").hidden = list.length === 0;
  }

  // show puts the cursor on the place in the document that a pointer names.
  function show(pointer) {
    const field = $("body");
    const place = placeOf(field.value, pointer);
    if (!place) return;
    field.focus();
    field.setSelectionRange(place[0], place[1]);
    const line = field.value.slice(0, place[0]).split("\n").length;
    field.scrollTop = Math.max(0, (line - 6) * (field.scrollHeight / field.value.split("\n").length));
  }

  async function present(r, took) {
    const kind = (r.headers.get("Content-Type") || "").split(";")[0];
    $("headers").textContent = [...r.headers].map(([n, v]) => n + ": " + v).join("\n");
    $("headers-row").hidden = false;
    const blob = await r.blob();
    const size = blob.size < 10000 ? blob.size + " bytes" : Math.round(blob.size / 1000) + " kB";
    let verdict = "";
    if (kind === "application/json" || kind.endsWith("+json")) {
      const text = await blob.text();
      const value = JSON.parse(text);
      $("shown").replaceChildren(preformatted(JSON.stringify(value, null, 2)));
      if (kind === "application/problem+json") {
        verdict = value.detail ? `: ${value.title}. ${value.detail}` : ": " + value.title;
        faults(value);
      } else {
        if (typeof value.status === "string") verdict = ": " + value.status;
        answered = value;
        offer(value);
      }
    } else if (kind.startsWith("image/")) {
      $("shown").replaceChildren(await picture(blob));
    } else if (kind === "text/html") {
      $("shown").replaceChildren(page(await blob.text()));
    } else {
      $("shown").replaceChildren(preformatted(await blob.text()));
    }
    say(`${r.status}${verdict} (${Math.round(took)} ms, ${size})`, r.ok ? "good" : "bad");
  }

  // offer lets the stage of an answer be posted on to another operation.
  function offer(value) {
    const onward = operations.filter((o) => o.body && o.example && o.id !== $("operation").value && o.takes_stage);
    $("onward").hidden = !value.stage || onward.length === 0;
    $("next").replaceChildren(...onward.map((o) => option(o.id, o.summary)));
  }

  async function carryOn() {
    const from = answered;
    $("operation").value = $("next").value;
    await choose();
    const document_ = JSON.parse($("body").value);
    for (const name of carried) {
      if (from[name] !== undefined && document_[name] !== undefined) document_[name] = from[name];
    }
    $("body").value = JSON.stringify(document_, null, 2);
    $("note").textContent = "The stage was taken over.";
    $("body").focus();
  }

  const pause = (ms, signal) => new Promise((done, stopped) => {
    const timer = setTimeout(done, ms);
    signal.addEventListener("abort", () => { clearTimeout(timer); stopped(signal.reason); }, { once: true });
  });

  // follow waits for a job and returns the response that holds its result.
  async function follow(location, h, signal) {
    const get = (path) => fetch(path, { headers: h, signal });
    for (;;) {
      const r = await get(location);
      if (!r.ok) return r;
      const job = await r.clone().json();
      $("progress").hidden = false;
      $("progress").value = job.progress.fraction_ratio;
      say(`${job.state}, ${Math.round(job.progress.fraction_ratio * 100)} %`);
      if (job.state === "done") return get("/v1/results/" + job.result_id);
      if (job.state !== "waiting" && job.state !== "running") return r;
      await pause(pollAfter, signal);
    }
  }

  async function send() {
    if (running) running.abort();
    const control = new AbortController();
    running = control;
    clear();
    say("Under way");
    $("stop").hidden = false;
    const op = operation();
    const h = headers(op);
    let job = "";
    const start = performance.now();
    try {
      let r = await fetch(address(op), { method: op.method, headers: h, body: op.body ? $("body").value : undefined, signal: control.signal });
      if (r.status === 202) {
        job = r.headers.get("Location");
        const plain = h.Authorization ? { Authorization: h.Authorization } : {};
        r = await follow(job, plain, control.signal);
      }
      await present(r, performance.now() - start);
    } catch (e) {
      if (running !== control) return;
      if (e.name === "AbortError") {
        say("Stopped");
        if (job) await fetch(job, { method: "DELETE", headers: h.Authorization ? { Authorization: h.Authorization } : {} });
      } else {
        say("No answer came: " + e.message, "bad");
      }
    } finally {
      if (running === control) {
        running = null;
        $("stop").hidden = true;
      }
    }
  }

  $("operation").replaceChildren(...operations.map((o) => option(o.id, `${o.summary} (${o.method} ${o.path})`)));
  const asked = location.hash.slice(1);
  $("operation").value = operations.some((o) => o.id === asked) ? asked : (operations.find((o) => o.id === "losses") || operations[0]).id;
  $("operation").addEventListener("change", choose);
  $("rail").addEventListener("change", loadExample);
  for (const id of ["form", "deferred", "key"]) $(id).addEventListener("change", showShell);
  $("ask").addEventListener("submit", (e) => { e.preventDefault(); send(); });
  $("stop").addEventListener("click", () => running && running.abort());
  $("carry").addEventListener("click", carryOn);
  $("body").addEventListener("keydown", (e) => {
    if (e.key === "Enter" && (e.ctrlKey || e.metaKey)) { e.preventDefault(); send(); }
  });
  fetch("/openapi.json").then((r) => r.json()).then((c) => { contract = c; }).catch(() => {}).finally(choose);
});
