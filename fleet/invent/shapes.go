package invent

// shapes of the responses that invented resources have. The governors come within what
// the areas of Regulation (EU) 2017/1485, Annex V, ask for (10 to 30 s); the battery
// within 1 s.
var shapes = []string{
	"{name: steam_governor, delay_s: 0.5, ramp_s: 9}",
	"{name: gas_governor, delay_s: 0.3, ramp_s: 6}",
	"{name: hydro_governor, delay_s: 0.8, ramp_s: 11}",
	"{name: battery, delay_s: 0.15, ramp_s: 0.35, hold_s: 900, withdraw_s: 60}",
	"{name: demand_trip, delay_s: 0.4, ramp_s: 0.1}",
	"{name: wind_headroom, delay_s: 0.3, ramp_s: 1.5}",
	"{name: wind_rotor, delay_s: 0.2, ramp_s: 0.6, hold_s: 8, withdraw_s: 2, recovery_share: 0.3, recovery_s: 15}",
}
