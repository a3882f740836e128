package exchange

import (
	"context"

	"railproof/api/wire"
)

func loopGain(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.LoopGainRequest](tree)
	if err != nil {
		return nil, err
	}
	r, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.Loop(ctx, r)
	if err != nil {
		return nil, wire.LoopInvalid(err)
	}
	return wire.EncodeLoopGain(w, r, a, head), nil
}
