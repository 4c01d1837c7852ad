// Package rpc answers the calls: it joins the messages to the engine and adds
// nothing of its own to a number.
package rpc

import (
	"context"

	"google.golang.org/grpc"

	"calandria.example/calandria/engine/train"
	"calandria.example/calandria/engine/vetting"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/convert"
)

// Services are all services of the engine.
type Services struct {
	calandriav1.UnimplementedSteamServiceServer
	calandriav1.UnimplementedTrainServiceServer
	calandriav1.UnimplementedEngineServiceServer
	Limits *calandriav1.Limits // in force, as GetEngine tells them
}

// Names are the full names of the services, for health checks.
var Names = []string{
	calandriav1.SteamService_ServiceDesc.ServiceName,
	calandriav1.TrainService_ServiceDesc.ServiceName,
	calandriav1.EngineService_ServiceDesc.ServiceName,
}

// Register puts the services behind a door.
func (s *Services) Register(door grpc.ServiceRegistrar) {
	calandriav1.RegisterSteamServiceServer(door, s)
	calandriav1.RegisterTrainServiceServer(door, s)
	calandriav1.RegisterEngineServiceServer(door, s)
}

// GetSteamState answers with one state of water or steam.
func (s *Services) GetSteamState(_ context.Context, request *calandriav1.GetSteamStateRequest) (*calandriav1.SteamState, error) {
	state, err := convert.SteamRequest(request)
	if err != nil {
		return nil, err
	}
	return convert.SteamState(state), nil
}

// GetSaturation answers with both saturated phases.
func (s *Services) GetSaturation(_ context.Context, request *calandriav1.GetSaturationRequest) (*calandriav1.Saturation, error) {
	liquid, vapour, err := convert.SaturationRequest(request)
	if err != nil {
		return nil, err
	}
	return convert.Saturation(liquid, vapour), nil
}

// SolveEffect answers a question about one effect.
func (s *Services) SolveEffect(_ context.Context, request *calandriav1.SolveEffectRequest) (*calandriav1.EffectSolution, error) {
	plant, err := convert.EffectRequest(request)
	if err != nil {
		return nil, err
	}
	of, err := convert.SensitivitiesOf(request)
	if err != nil {
		return nil, err
	}
	answer, err := train.Solve(plant)
	if err != nil {
		return nil, err
	}
	solution := convert.EffectSolution(answer)
	if len(of) > 0 {
		list, err := train.Sensitivities(plant, answer, of)
		if err != nil {
			return nil, err
		}
		solution.Sensitivities = convert.Sensitivities(answer, list)
	}
	return solution, nil
}

// CheckEffect tells what a question about one effect amounts to.
func (s *Services) CheckEffect(_ context.Context, request *calandriav1.SolveEffectRequest) (*calandriav1.EffectCheck, error) {
	plant, err := convert.EffectRequest(request)
	if err != nil {
		return nil, err
	}
	check, err := train.CheckQuestion(plant)
	return convert.EffectCheck(check, err)
}

// GetEngine tells version, models and limits.
func (s *Services) GetEngine(context.Context, *calandriav1.GetEngineRequest) (*calandriav1.Engine, error) {
	return convert.Engine(convert.SteamModels(), s.Limits), nil
}

// VerifyEngine recomputes the published check values.
func (s *Services) VerifyEngine(context.Context, *calandriav1.VerifyEngineRequest) (*calandriav1.Verification, error) {
	return convert.Verification(vetting.Run()), nil
}
