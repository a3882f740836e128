// Lays the contract out. The viewer is told not to reach for anything outside.
"use strict";
document.addEventListener("DOMContentLoaded", () => {
  const place = document.getElementById("contract");
  const options = {
    disableSearch: false,
    hideDownloadButtons: false,
    nativeScrollbars: true,
    scrollYOffset: "nav",
    requiredPropsFirst: true,
    jsonSamplesExpandLevel: 3,
    theme: {
      colors: { primary: { main: "#0b5c6b" } },
      typography: { fontFamily: "system-ui, sans-serif", headings: { fontFamily: "system-ui, sans-serif" }, code: { fontFamily: "ui-monospace, monospace" } },
    },
  };
  Redoc.init("/openapi.json", options, place, (failed) => {
    const note = document.getElementById("loading");
    if (failed) {
      note.textContent = "The contract could not be laid out; it stands as text at /openapi.yaml.";
    } else {
      note.remove();
    }
  });
});
