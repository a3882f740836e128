package losses

import (
	"testing"

	"github.com/stretchr/testify/assert"
)

func TestRecoveryFadesInAtTheBorderOfConduction(t *testing.T) {
	assert.Zero(t, RecoveryShare(-0.2, 1))
	assert.Zero(t, RecoveryShare(0, 1))
	assert.InDelta(t, 0.5, RecoveryShare(0.005, 1), 1e-12)
	assert.Equal(t, 1.0, RecoveryShare(0.01, 1))
	assert.Equal(t, 1.0, RecoveryShare(5, 1))
	assert.Equal(t, 1.0, RecoveryShare(5, 0), "no ripple at all")
}
