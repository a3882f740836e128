package exchange

import (
	"context"

	"railproof/api/wire"
)

func proof(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.CornersRequest](tree)
	if err != nil {
		return nil, err
	}
	p, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.Corners(ctx, p)
	if err != nil {
		return nil, err
	}
	return wire.EncodeCorners(w, a, head), nil
}
