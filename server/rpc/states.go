package rpc

import (
	"context"

	"buf.build/go/protovalidate"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/convert"
	"calandria.example/calandria/server/statuses"
	"calandria.example/calandria/server/telemetry"
)

// itemBounds are the rules of one state's numbers.
var itemBounds = statuses.Bounds((&calandriav1.GetSteamStateRequest{}).ProtoReflect().Descriptor())

// ComputeSteamStates answers with many states, and says of each that it can not
// answer what GetSteamState would say.
func (s *Services) ComputeSteamStates(ctx context.Context, request *calandriav1.ComputeSteamStatesRequest) (*calandriav1.SteamStates, error) {
	columns, err := convert.SteamStatesRequest(request)
	if err != nil {
		return nil, err
	}
	const block = 256 // states between two looks at the clock
	for i := range columns.Len() {
		if i%block == 0 {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
		}
		err := itemRules(columns, i)
		if err == nil {
			err = columns.Compute(i)
		}
		if err == nil {
			continue
		}
		status, known := statuses.From(err, telemetry.ID(ctx))
		if !known {
			return nil, err
		}
		columns.Fail(i, statuses.Reason(status), status.Message(), statuses.Violations(status))
	}
	return columns.Answer(), nil
}

// itemRules applies the rules of GetSteamStateRequest to one state's numbers:
// by a quick look at their bounds, and in words only if one is broken.
func itemRules(columns *convert.SteamColumns, i int) error {
	first, second, a, b := columns.Values(i)
	if itemBounds[first](a) && itemBounds[second](b) {
		return nil
	}
	item := columns.Item(i)
	err := protovalidate.Validate(item)
	if violations, ok := statuses.FromValidation(err, item.ProtoReflect().Descriptor()); ok {
		return statuses.Invalid(violations...).Err()
	}
	return err
}
