package exchange

import (
	"context"

	"railproof/api/wire"
)

func substitutions(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.SubstitutionsRequest](tree)
	if err != nil {
		return nil, err
	}
	r, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.Substitutions(ctx, r)
	if err != nil {
		return nil, err
	}
	return wire.EncodeSubstitutions(r, a, head), nil
}
