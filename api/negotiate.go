package api

import (
	"mime"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
	"railproof/openapi"
)

// formKey is where checkAccept leaves the media type that was chosen.
const formKey = "form"

// checkAccept chooses the form of the answer and refuses a request that takes
// none of those the operation has.
func (a *API) checkAccept(op openapi.Operation, next echo.HandlerFunc) echo.HandlerFunc {
	forms := a.exchange.Forms(op)
	return func(c echo.Context) error {
		if len(forms) > 1 {
			c.Response().Header().Add(echo.HeaderVary, echo.HeaderAccept)
		}
		form := choose(c.Request().Header.Values(echo.HeaderAccept), forms)
		if form == "" {
			return refusal{exchange.NewProblem(exchange.NotAcceptable, "this operation gives "+strings.Join(forms, ", "))}
		}
		c.Set(formKey, form)
		return next(c)
	}
}

// choose returns the form that the Accept header weighs most, the first of equals;
// "" if it takes none. Without a header the first form is given.
func choose(accept, forms []string) string {
	if len(accept) == 0 {
		return forms[0]
	}
	ranges := strings.Split(strings.Join(accept, ","), ",")
	chosen, most := "", 0.0
	for _, form := range forms {
		if w := weight(ranges, form); w > most {
			chosen, most = form, w
		}
	}
	return chosen
}

// weight returns the quality of the most specific range that covers the form
// (RFC 9110, section 12.5.1).
func weight(ranges []string, form string) float64 {
	kind, _, _ := strings.Cut(form, "/")
	covers := []string{"*/*", kind + "/*", form}
	quality, specific := 0.0, -1
	for _, r := range ranges {
		name, parameters, err := mime.ParseMediaType(r)
		if err != nil {
			continue
		}
		if i := slices.Index(covers, name); i > specific {
			quality, specific = 1, i
			if q, given := parameters["q"]; given {
				v, err := strconv.ParseFloat(q, 64)
				if err != nil || !(v >= 0 && v <= 1) {
					v = 0
				}
				quality = v
			}
		}
	}
	return quality
}

// jsonBody reports why a request's body is not JSON as it must be, "" if it is.
func jsonBody(c echo.Context) string {
	h := c.Request().Header
	if e := h.Get(echo.HeaderContentEncoding); e != "" && !strings.EqualFold(e, "identity") {
		return "a body with Content-Encoding is not taken; send it as it is"
	}
	name, parameters, err := mime.ParseMediaType(h.Get(echo.HeaderContentType))
	if err != nil || name != echo.MIMEApplicationJSON {
		return "the body must be application/json; say so in Content-Type"
	}
	if set, given := parameters["charset"]; given && !strings.EqualFold(set, "utf-8") {
		return "the body must be UTF-8"
	}
	return ""
}
