package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"os"
	"slices"
	"strings"

	"railproof/api/exchange"
	"railproof/api/render"
	"railproof/openapi"
	"railproof/service"
)

// pictureFlags ask for pictures of an answer, beside the answer.
type pictureFlags struct {
	svg, png string
	view     exchange.View
}

// declare adds the flags where the operation can be drawn.
func (p *pictureFlags) declare(flags *flag.FlagSet, operation string) {
	if !exchange.Drawable(operation) {
		return
	}
	flags.StringVar(&p.svg, "svg", "", "write a picture to `FILE` as SVG")
	flags.StringVar(&p.png, "png", "", "write a picture to `FILE` as PNG")
	flags.StringVar(&p.view.Picture, "picture", "", "which picture: `NAME`, one of "+exchange.PictureNames(operation))
	flags.StringVar(&p.view.Quantity, "quantity", "", "`KEY` of the quantity that the picture shows, where it shows one")
	flags.IntVar(&p.view.Item, "item", 0, "`NUMBER` of the point that the picture shows, from 0")
	flags.IntVar(&p.view.Width, "width-px", 0, "`WIDTH` of the picture in pixels (default 800)")
}

// check refuses before anything is computed what no answer could be drawn by.
func (p *pictureFlags) check(operation string) error {
	names := exchange.PictureNames(operation)
	if p.view.Picture != "" && !slices.Contains(strings.Split(names, ", "), p.view.Picture) {
		return fmt.Errorf("no picture %q; there are: %s", p.view.Picture, names)
	}
	if w := p.view.Width; w != 0 && (w < render.LeastWidth || w > render.MostWidth) {
		return fmt.Errorf("a picture %d pixels wide; accepted: %d to %d", w, render.LeastWidth, render.MostWidth)
	}
	return nil
}

// around writes the pictures after the answer was computed.
func (p *pictureFlags) around(ctx context.Context, operation string) around {
	return around{before: func(body []byte) ([]byte, error) { return body, p.check(operation) }, after: func(_ string, body []byte, a *exchange.Answer) error {
		for _, f := range []struct{ file, form string }{{p.svg, "image/svg+xml"}, {p.png, "image/png"}} {
			if f.file == "" {
				continue
			}
			picture, problem := a.Draw(f.form, p.view)
			if problem != nil && operation == "steadyState" { // the request asked for no waveforms
				picture, problem = p.again(ctx, operation, body, f.form)
			}
			if problem != nil {
				return errors.New(problem.Detail + "; there are: " + exchange.PictureNames(operation))
			}
			if err := os.WriteFile(f.file, picture, 0o600); err != nil {
				return err
			}
		}
		return nil
	}}
}

// again computes the answer as its picture wants it.
func (p *pictureFlags) again(ctx context.Context, operation string, body []byte, form string) ([]byte, *exchange.Problem) {
	contract := openapi.Load()
	x := exchange.New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	request, problem := x.Read(operation, body)
	if problem != nil {
		return nil, problem
	}
	request.Draw(p.view)
	answer, problem := x.Answer(ctx, request)
	if problem != nil {
		return nil, problem
	}
	return answer.Draw(form, p.view)
}
