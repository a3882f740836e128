package wire

import "railproof/service"

// design decodes the stage of a request for a use case.
func (w *Stage) design() (*service.Design, error) {
	const at = "/stage"
	d, err := w.Decode(at)
	if err != nil {
		return nil, err
	}
	return &service.Design{At: at, Stage: d.Stage, Variables: d.Variables, Assumed: d.Assumed, Unused: d.Unused}, nil
}
