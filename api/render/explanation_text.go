package render

import "railproof/api/wire"

// explanation writes how figures follow.
func (p *page) explanation(list []wire.Equation) {
	if len(list) == 0 {
		return
	}
	p.title("how the figures follow")
	for i := range list {
		e := &list[i]
		p.wrapped("- "+e.Quantity+" = "+Figure3(e.Value, e.Unit)+": "+e.Formula+"; "+e.Inserted+" ("+e.Source+")", "  ")
	}
}
