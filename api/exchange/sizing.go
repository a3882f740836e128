package exchange

import (
	"context"

	"railproof/api/wire"
)

func size(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.SizingRequest](tree)
	if err != nil {
		return nil, err
	}
	r, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.Sizing(ctx, r)
	if err != nil {
		return nil, err
	}
	return wire.EncodeSizing(w, r, a, head), nil
}
