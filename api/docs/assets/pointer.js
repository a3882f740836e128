// Finds the place of a JSON Pointer (RFC 6901) in the text of a document.
"use strict";

// placeOf returns [start, end] of the value that the pointer names, or of its
// nearest parent that exists; null if the text cannot be read that far.
function placeOf(text, pointer) {
  const wanted = pointer === "" ? [] : pointer.slice(1).split("/").map((t) => t.replace(/~1/g, "/").replace(/~0/g, "~"));
  let at = 0;
  let best = null;

  const space = () => { while (" \t\n\r".includes(text[at]) && at < text.length) at++; };
  const string = () => {
    const start = at++;
    while (at < text.length && text[at] !== '"') at += text[at] === "\\" ? 2 : 1;
    at++;
    return JSON.parse(text.slice(start, at));
  };
  const value = (depth, onPath) => {
    space();
    const start = at;
    const container = text[at];
    if (container === "{" || container === "[") {
      at++;
      space();
      for (let i = 0; at < text.length && text[at] !== "}" && text[at] !== "]"; i++) {
        let name = String(i);
        if (container === "{") {
          name = string();
          space();
          at++;
        }
        value(depth + 1, onPath && depth < wanted.length && wanted[depth] === name);
        space();
        if (text[at] === ",") at++;
        space();
      }
      at++;
    } else if (container === '"') {
      string();
    } else {
      while (at < text.length && !",]} \t\n\r".includes(text[at])) at++;
    }
    if (onPath && (best === null || depth > best.depth)) best = { depth, start, end: at };
  };

  try {
    value(0, true);
  } catch {
    // What was passed before the text stopped being JSON still counts.
  }
  return best === null ? null : [best.start, Math.min(best.end, text.length)];
}
