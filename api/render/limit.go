package render

import "railproof/api/wire"

const worstPlace = "worst"

// limitPlace says where a limit must hold.
func limitPlace(l *wire.Limit) string {
	switch {
	case l.FullLoad != nil && *l.FullLoad:
		return "full load"
	case l.At != "":
		return l.At
	}
	return worstPlace
}
