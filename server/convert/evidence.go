package convert

import (
	"calandria.example/calandria/engine"
	"calandria.example/calandria/engine/evidence"
	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/vetting"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

var codes = map[evidence.Code]calandriav1.AdvisoryCode{
	evidence.OutsideRange:       calandriav1.AdvisoryCode_ADVISORY_CODE_OUTSIDE_RANGE,
	evidence.NoHeatOfDilution:   calandriav1.AdvisoryCode_ADVISORY_CODE_NO_HEAT_OF_DILUTION,
	evidence.SecondAnswer:       calandriav1.AdvisoryCode_ADVISORY_CODE_SECOND_ANSWER,
	evidence.HeldBeyondStrength: calandriav1.AdvisoryCode_ADVISORY_CODE_HELD_BEYOND_STRENGTH,
	evidence.FeedFlashes:        calandriav1.AdvisoryCode_ADVISORY_CODE_FEED_FLASHES,
	evidence.SmallDrivingForce:  calandriav1.AdvisoryCode_ADVISORY_CODE_SMALL_DRIVING_FORCE,
	evidence.BoundaryJump:       calandriav1.AdvisoryCode_ADVISORY_CODE_BOUNDARY_JUMP,
	evidence.Crystallisation:    calandriav1.AdvisoryCode_ADVISORY_CODE_CRYSTALLISATION,
}

var grades = map[evidence.Grade]calandriav1.Grade{
	evidence.Confirmed:      calandriav1.Grade_GRADE_CONFIRMED,
	evidence.Approximate:    calandriav1.Grade_GRADE_APPROXIMATE,
	evidence.Doubtful:       calandriav1.Grade_GRADE_DOUBTFUL,
	evidence.CallerSupplied: calandriav1.Grade_GRADE_CALLER_SUPPLIED,
}

func advisories(list []evidence.Advisory) []*calandriav1.Advisory {
	messages := make([]*calandriav1.Advisory, len(list))
	for i, a := range list {
		severity := calandriav1.Severity_SEVERITY_NOTE
		if a.Warning {
			severity = calandriav1.Severity_SEVERITY_WARNING
		}
		messages[i] = &calandriav1.Advisory{
			Code: codes[a.Code], Severity: severity, Field: a.Field, Message: a.Message, Limit: a.Limit,
		}
	}
	return messages
}

func models(list []evidence.Model) []*calandriav1.Model {
	messages := make([]*calandriav1.Model, len(list))
	for i, m := range list {
		messages[i] = &calandriav1.Model{
			Id: m.ID, Revision: m.Revision, Source: m.Source, ValidRange: m.ValidRange,
			Grade: grades[m.Grade], Inside: m.Inside,
		}
	}
	return messages
}

func provenance(list []evidence.Model) *calandriav1.Provenance {
	return &calandriav1.Provenance{EngineVersion: engine.Version, Models: models(list)}
}

// Engine describes the engine and the limits around it.
func Engine(list []evidence.Model, limits *calandriav1.Limits) *calandriav1.Engine {
	return &calandriav1.Engine{EngineVersion: engine.Version, Models: models(list), Limits: limits}
}

// Verification reports published values against the engine's own.
func Verification(results []vetting.Result) *calandriav1.Verification {
	v := &calandriav1.Verification{
		Passed: true, Count: int32(len(results)), Failed: 0, EngineVersion: engine.Version,
		Checks: make([]*calandriav1.Check, len(results)),
	}
	for i, r := range results {
		v.Checks[i] = &calandriav1.Check{
			Id: r.ID, Quantity: r.Quantity, Unit: r.Unit, Source: r.Source,
			Published: r.Published, Computed: r.Computed, Tolerance: r.Tolerance,
			Deviation: r.Deviation, Passed: r.Passed,
		}
		if !r.Passed {
			v.Passed = false
			v.Failed++
		}
	}
	return v
}

func unknownFind(path string) error {
	return &fault.Invalid{Field: "find", Value: path, Limit: "a path that has a default", WayOut: "name a number such as effect.vent_fraction"}
}
