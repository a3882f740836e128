// Package browser drives a headless Chromium; its code carries the tag e2e.
package browser
