package api

import (
	"strconv"

	"github.com/labstack/echo/v4"

	"railproof/api/exchange"
)

// view reads the query parameters of a picture, which the contract has checked.
func view(c echo.Context) exchange.View {
	number := func(name string) int {
		n, err := strconv.Atoi(c.QueryParam(name))
		if err != nil {
			return 0
		}
		return n
	}
	return exchange.View{Picture: c.QueryParam("picture"), Quantity: c.QueryParam("quantity"), Item: number("item"), Width: number("width_px")}
}
