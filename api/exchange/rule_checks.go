package exchange

import (
	"context"

	"railproof/api/wire"
)

func ruleChecks(ctx context.Context, x *Exchange, tree any, head wire.Head) (any, error) {
	w, err := decode[wire.RuleChecksRequest](tree)
	if err != nil {
		return nil, err
	}
	p, err := w.Decode()
	if err != nil {
		return nil, err
	}
	a, err := x.service.RuleChecks(ctx, p)
	if err != nil {
		return nil, err
	}
	return wire.EncodeRuleChecks(w, p, a, head), nil
}
