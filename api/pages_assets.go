package api

import (
	"github.com/labstack/echo/v4"

	"railproof/api/docs"
)

// assetsPath is served as it is stored, mostly compressed; no middleware squeezes it
// again.
const assetsPath = "/docs/assets/:file"

// docsAssets answers /docs/assets/{file}.
func docsAssets() echo.HandlerFunc {
	handlers := map[string]echo.HandlerFunc{}
	for _, asset := range docs.Assets() {
		squeezed := document(asset.MediaType, asset.Squeezed)
		handlers[asset.Name] = func(c echo.Context) error {
			h := c.Response().Header()
			h.Add(echo.HeaderVary, echo.HeaderAcceptEncoding)
			if !takesGzip(c.Request().Header.Values(echo.HeaderAcceptEncoding)) {
				return document(asset.MediaType, asset.Body())(c)
			}
			h.Set(echo.HeaderContentEncoding, "gzip")
			return squeezed(c)
		}
	}
	return oneOf(handlers, "file")
}
