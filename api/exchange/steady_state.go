package exchange

import (
	"context"

	"railproof/api/wire"
)

func steadyState(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.SteadyStateRequest](tree)
	if err != nil {
		return nil, err
	}
	r, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.SteadyState(ctx, r)
	if err != nil {
		return nil, err
	}
	return wire.EncodeSteadyState(w, r, a, head), nil
}
