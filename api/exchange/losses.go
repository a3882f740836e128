package exchange

import (
	"context"

	"railproof/api/wire"
)

func losses(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.LossesRequest](tree)
	if err != nil {
		return nil, err
	}
	points, grid, err := w.Decode()
	if err != nil {
		return nil, err
	}
	if grid != nil {
		a, err := x.service.LossesGrid(ctx, grid)
		if err != nil {
			return nil, err
		}
		return wire.EncodeLossesGrid(w, grid, a, head), nil
	}
	a, err := x.service.Losses(ctx, points)
	if err != nil {
		return nil, err
	}
	return wire.EncodeLosses(w, points, a, head), nil
}
