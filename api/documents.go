package api

import (
	"crypto/sha256"
	"encoding/hex"
	"net/http"
	"strings"

	"github.com/labstack/echo/v4"
)

// document serves bytes that do not change while the program runs. The entity tag
// is weak because gzip may change the bytes on the way.
func document(mediaType string, body []byte) echo.HandlerFunc {
	sum := sha256.Sum256(body)
	tag := `W/"` + hex.EncodeToString(sum[:16]) + `"`
	return func(c echo.Context) error {
		h := c.Response().Header()
		h.Set("ETag", tag)
		h.Set(echo.HeaderCacheControl, "no-cache")
		if holds(c.Request().Header.Get("If-None-Match"), tag) {
			return c.NoContent(http.StatusNotModified)
		}
		return c.Blob(http.StatusOK, mediaType, body)
	}
}

// holds reports whether an If-None-Match header names the tag, by the weak
// comparison of RFC 9110, section 8.8.3.2.
func holds(header, tag string) bool {
	if strings.TrimSpace(header) == "*" {
		return true
	}
	for candidate := range strings.SplitSeq(header, ",") {
		if strings.TrimPrefix(strings.TrimSpace(candidate), "W/") == strings.TrimPrefix(tag, "W/") {
			return true
		}
	}
	return false
}
