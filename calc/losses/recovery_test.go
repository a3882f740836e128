package losses

import (
	"testing"

	"github.com/stretchr/testify/assert"
)

func TestRecoveryFadesInAtTheBorderOfConduction(t *testing.T) {
	assert.Zero(t, recoveryShare(-0.2, 1))
	assert.Zero(t, recoveryShare(0, 1))
	assert.InDelta(t, 0.5, recoveryShare(0.005, 1), 1e-12)
	assert.Equal(t, 1.0, recoveryShare(0.01, 1))
	assert.Equal(t, 1.0, recoveryShare(5, 1))
	assert.Equal(t, 1.0, recoveryShare(5, 0), "no ripple at all")
}
