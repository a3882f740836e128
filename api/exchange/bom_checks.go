package exchange

import (
	"context"

	"railproof/api/wire"
)

func bomChecks(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.BomChecksRequest](tree)
	if err != nil {
		return nil, err
	}
	r, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.BomChecks(ctx, r)
	if err != nil {
		return nil, err
	}
	return wire.EncodeBomChecks(r, a, head), nil
}
