package exchange

import (
	"context"

	"railproof/api/wire"
)

func transients(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.TransientsRequest](tree)
	if err != nil {
		return nil, err
	}
	r, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.Transients(ctx, r)
	if err != nil {
		return nil, wire.TransientsInvalid(err)
	}
	return wire.EncodeTransients(w, a, head), nil
}
