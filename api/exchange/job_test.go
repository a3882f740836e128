package exchange

import (
	"reflect"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

func TestJobsHaveTheShapeOfTheContract(t *testing.T) {
	require.Empty(t, openapi.Load().CompareType("Job", reflect.TypeFor[Job]()))
	require.Empty(t, openapi.Load().CompareType("JobsAnswer", reflect.TypeFor[JobsAnswer]()))
}
