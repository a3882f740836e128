package stage_test

import (
	"errors"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/stage"
)

func TestDriveMustExceedThePlateau(t *testing.T) {
	s := complete(stage.Synchronous)
	s.HighSide.Plateau = s.Controller.Drive
	var invalid *stage.InvalidError
	require.True(t, errors.As(s.Check(), &invalid))
	require.Len(t, invalid.Faults, 1)
	assert.Equal(t, "controller/drive_v", invalid.Faults[0].Field)
	s.HighSide.Plateau = s.Controller.Drive - 0.1
	assert.NoError(t, s.Check())
}
