package quantity

// The identifiers. A per-bank quantity takes Banks places in a row.
const (
	OutputMean                 ID = 0
	OutputRipplePP                = OutputMean + 1
	OutputRippleWithESLPP         = OutputRipplePP + 1
	InputRipplePP                 = OutputRippleWithESLPP + 1
	InductorMean                  = InputRipplePP + 1
	InductorRipplePP              = InductorMean + 1
	InductorPeak                  = InductorRipplePP + 1
	InductorValley                = InductorPeak + 1
	InductorRMS                   = InductorValley + 1
	HighSideMean                  = InductorRMS + 1
	HighSideRMS                   = HighSideMean + 1
	RectifierMean                 = HighSideRMS + 1
	RectifierRMS                  = RectifierMean + 1
	OutputCapacitorRMS            = RectifierRMS + 1
	InputCapacitorRMS             = OutputCapacitorRMS + Banks
	InputCapacitorBankRMS         = InputCapacitorRMS + 1
	CircuitInputMean              = InputCapacitorBankRMS + Banks
	DutyRatio                     = CircuitInputMean + 1
	DeadTimeDutyRatio             = DutyRatio + 1
	EnergyBalance                 = DeadTimeDutyRatio + 1
	InductanceEffective           = EnergyBalance + 1
	OutputCapacitanceEffective    = InductanceEffective + 1
	InputCapacitanceEffective     = OutputCapacitanceEffective + Banks
	BridgeVoltage                 = InputCapacitanceEffective + Banks
	OnTime                        = BridgeVoltage + 1
	OffTime                       = OnTime + 1
	BoundaryLoad                  = OffTime + 1
	LoadVoltage                   = BoundaryLoad + 1
	OutputError                   = LoadVoltage + 1
	InputMean                     = OutputError + 1
	InputPower                    = InputMean + 1
	OutputPower                   = InputPower + 1
	LossTotal                     = OutputPower + 1
	Efficiency                    = LossTotal + 1
	HighSideLoss                  = Efficiency + 1
	LowSideLoss                   = HighSideLoss + 1
	DiodeLoss                     = LowSideLoss + 1
	InductorLoss                  = DiodeLoss + 1
	CoreLoss                      = InductorLoss + 1
	CorePowerDensity              = CoreLoss + 1
	FluxSwing                     = CorePowerDensity + 1
	OutputCapacitorLoss           = FluxSwing + 1
	InputCapacitorLoss            = OutputCapacitorLoss + Banks
	ControllerLoss                = InputCapacitorLoss + Banks
	BoardLoss                     = ControllerLoss + 1
	HighSideJunction              = BoardLoss + 1
	LowSideJunction               = HighSideJunction + 1
	DiodeJunction                 = LowSideJunction + 1
	InductorWinding               = DiodeJunction + 1
	ControllerJunction            = InductorWinding + 1
	OutputCapacitorTemperature    = ControllerJunction + 1
	InputCapacitorTemperature     = OutputCapacitorTemperature + Banks
	OutputCapacitorLife           = InputCapacitorTemperature + Banks
	InputCapacitorLife            = OutputCapacitorLife + Banks
	ThermalFeedback               = InputCapacitorLife + Banks
	Crossover                     = ThermalFeedback + 1
	PhaseMargin                   = Crossover + 1
	GainMargin                    = PhaseMargin + 1
	ModulusMargin                 = GainMargin + 1
	LoadStepDeviation             = ModulusMargin + 1
	LoadStepRecovery              = LoadStepDeviation + 1
	LoadStepPeak                  = LoadStepRecovery + 1
	// Count is the length of a Vector.
	Count = LoadStepPeak + 1
)

var table = []Info{
	{ID: OutputMean, Key: "output_mean_v", Unit: "V", Symbol: "Vo", Meaning: "mean output voltage at the capacitor node", Source: "exact integral over the period", Family: Single, Group: SteadyState},
	{ID: OutputRipplePP, Key: "output_ripple_pp_v", Unit: "V", Symbol: "ΔVo", Meaning: "peak-to-peak output voltage at the capacitor node, without series inductance", Source: "true extremes inside each interval", Family: Single, Group: SteadyState},
	{ID: OutputRippleWithESLPP, Key: "output_ripple_with_esl_pp_v", Unit: "V", Symbol: "ΔVo,esl", Meaning: "peak-to-peak output voltage including the edge step of the capacitors' series inductance", Source: "edge step ESL Vin/L, banks in parallel", Family: Single, Group: SteadyState},
	{ID: InputRipplePP, Key: "input_ripple_pp_v", Unit: "V", Symbol: "ΔVin", Meaning: "peak-to-peak voltage at the input capacitors", Source: "exact bank solution, source supplies its mean only", Family: Single, Group: SteadyState},
	{ID: InductorMean, Key: "inductor_mean_a", Unit: "A", Symbol: "IL", Meaning: "mean inductor current of one phase", Source: "exact integral over the period", Family: Single, Group: SteadyState},
	{ID: InductorRipplePP, Key: "inductor_ripple_pp_a", Unit: "A", Symbol: "ΔIL", Meaning: "peak-to-peak inductor current of one phase", Source: "true extremes inside each interval", Family: Single, Group: SteadyState},
	{ID: InductorPeak, Key: "inductor_peak_a", Unit: "A", Symbol: "Ipk", Meaning: "greatest inductor current of one phase", Source: "true extreme; with saturation from the flux curve", Family: Single, Group: SteadyState},
	{ID: InductorValley, Key: "inductor_valley_a", Unit: "A", Symbol: "Ivl", Meaning: "least (most negative) inductor current of one phase", Source: "true extreme", Family: Single, Group: SteadyState},
	{ID: InductorRMS, Key: "inductor_rms_a", Unit: "A", Symbol: "IL,rms", Meaning: "RMS inductor current of one phase", Source: "exact integral over the period", Family: Single, Group: SteadyState},
	{ID: HighSideMean, Key: "high_side_mean_a", Unit: "A", Symbol: "Ihs", Meaning: "mean high-side current of one phase", Source: "exact integral over the on-time", Family: Single, Group: SteadyState},
	{ID: HighSideRMS, Key: "high_side_rms_a", Unit: "A", Symbol: "Ihs,rms", Meaning: "RMS high-side current of one phase", Source: "exact integral over the on-time", Family: Single, Group: SteadyState},
	{ID: RectifierMean, Key: "rectifier_mean_a", Unit: "A", Symbol: "Ir", Meaning: "mean rectifier current of one phase", Source: "exact integral over the off-time", Family: Single, Group: SteadyState},
	{ID: RectifierRMS, Key: "rectifier_rms_a", Unit: "A", Symbol: "Ir,rms", Meaning: "RMS rectifier current of one phase", Source: "exact integral over the off-time", Family: Single, Group: SteadyState},
	{ID: OutputCapacitorRMS, Key: "output_capacitor_rms_a", Unit: "A", Symbol: "Ico", Meaning: "RMS current of each output capacitor bank", Source: "exact integral of the bank current", Family: PerOutputBank, Group: SteadyState},
	{ID: InputCapacitorRMS, Key: "input_capacitor_rms_a", Unit: "A", Symbol: "Ici", Meaning: "RMS alternating current of all input capacitors together", Source: "RMS and mean of the summed high-side current", Family: Single, Group: SteadyState},
	{ID: InputCapacitorBankRMS, Key: "input_capacitor_bank_rms_a", Unit: "A", Symbol: "Ici,k", Meaning: "RMS current of each input capacitor bank", Source: "exact bank solution", Family: PerInputBank, Group: SteadyState},
	{ID: CircuitInputMean, Key: "circuit_input_mean_a", Unit: "A", Symbol: "Iin,c", Meaning: "mean current that the switched circuit draws from the bridge voltage", Source: "exact integral over the on-time", Family: Single, Group: SteadyState},
	{ID: DutyRatio, Key: "duty_ratio", Unit: "1", Symbol: "D", Meaning: "fraction of the period in which the switch node is driven high, without dead time", Source: "solved", Family: Single, Group: SteadyState},
	{ID: DeadTimeDutyRatio, Key: "dead_time_duty_ratio", Unit: "1", Symbol: "ΔD", Meaning: "correction of the duty ratio by dead time", Source: "2 td f (Vsd - I Rls)/Vin", Family: Single, Group: SteadyState},
	{ID: EnergyBalance, Key: "energy_balance_ratio", Unit: "1", Symbol: "ε", Meaning: "residual of input, output and circuit losses, normalised", Source: "residual / max(|Pin|, |Pout|, Vin Ihs,rms)", Family: Single, Group: SteadyState},
	{ID: InductanceEffective, Key: "inductance_effective_h", Unit: "H", Symbol: "L", Meaning: "inductance of one phase over the actual current swing", Source: "mean incremental inductance over [valley, peak]", Family: Single, Group: SteadyState},
	{ID: OutputCapacitanceEffective, Key: "output_capacitance_effective_f", Unit: "F", Symbol: "Co,k", Meaning: "capacitance of each output bank at bias, temperature and age", Source: "count C bias temp ageing", Family: PerOutputBank, Group: SteadyState},
	{ID: InputCapacitanceEffective, Key: "input_capacitance_effective_f", Unit: "F", Symbol: "Ci,k", Meaning: "capacitance of each input bank at bias, temperature and age", Source: "count C bias temp ageing", Family: PerInputBank, Group: SteadyState},
	{ID: BridgeVoltage, Key: "bridge_v", Unit: "V", Symbol: "Vin,b", Meaning: "voltage at the input capacitors, which the switches block", Source: "input minus the drop of source and input path", Family: Single, Group: SteadyState},
	{ID: OnTime, Key: "on_time_s", Unit: "s", Symbol: "ton", Meaning: "time for which the high side is commanded on, dead-time correction included", Source: "(D + ΔD)/f", Family: Single, Group: SteadyState},
	{ID: OffTime, Key: "off_time_s", Unit: "s", Symbol: "toff", Meaning: "rest of the period", Source: "1/f - ton", Family: Single, Group: SteadyState},
	{ID: BoundaryLoad, Key: "boundary_load_a", Unit: "A", Symbol: "Ib", Meaning: "load current below which conduction becomes discontinuous, or the valley negative", Source: "N ΔIL/2 in continuous conduction at this point", Family: Single, Group: SteadyState},
	{ID: LoadVoltage, Key: "load_v", Unit: "V", Symbol: "Vl", Meaning: "mean voltage at the load, after the output path", Source: "Vo minus the drop of the output path", Family: Single, Group: SteadyState},
	{ID: OutputError, Key: "output_error_ratio", Unit: "1", Symbol: "δVo", Meaning: "deviation of the load voltage from the voltage asked for", Source: "Vl/Vset - 1", Family: Single, Group: SteadyState},
	{ID: InputMean, Key: "input_mean_a", Unit: "A", Symbol: "Iin", Meaning: "mean current from the source, all losses included", Source: "Pin/Vin", Family: Single, Group: Losses},
	{ID: InputPower, Key: "input_power_w", Unit: "W", Symbol: "Pin", Meaning: "power from the source", Source: "bridge voltage times circuit input current, plus every added item", Family: Single, Group: Losses},
	{ID: OutputPower, Key: "output_power_w", Unit: "W", Symbol: "Po", Meaning: "power in the load", Source: "mean of load voltage times load current", Family: Single, Group: Losses},
	{ID: LossTotal, Key: "loss_total_w", Unit: "W", Symbol: "Ploss", Meaning: "sum of every loss item", Source: "table of loss items", Family: Single, Group: Losses},
	{ID: Efficiency, Key: "efficiency_ratio", Unit: "1", Symbol: "η", Meaning: "output over input power", Source: "Po/Pin", Family: Single, Group: Losses},
	{ID: HighSideLoss, Key: "high_side_loss_w", Unit: "W", Symbol: "Phs", Meaning: "loss in one phase's high-side switch", Source: "sum of its items", Family: Single, Group: Losses},
	{ID: LowSideLoss, Key: "low_side_loss_w", Unit: "W", Symbol: "Pls", Meaning: "loss in one phase's low-side switch", Source: "sum of its items", Family: Single, Group: Losses},
	{ID: DiodeLoss, Key: "diode_loss_w", Unit: "W", Symbol: "Pd", Meaning: "loss in one phase's rectifier diode", Source: "sum of its items", Family: Single, Group: Losses},
	{ID: InductorLoss, Key: "inductor_loss_w", Unit: "W", Symbol: "Pl", Meaning: "loss in one phase's inductor", Source: "sum of its items", Family: Single, Group: Losses},
	{ID: CoreLoss, Key: "core_loss_w", Unit: "W", Symbol: "Pcore", Meaning: "core loss of one phase's inductor", Source: "improved generalised Steinmetz equation", Family: Single, Group: Losses},
	{ID: CorePowerDensity, Key: "core_power_density_w_per_m3", Unit: "W/m3", Symbol: "pv", Meaning: "core loss per volume", Source: "improved generalised Steinmetz equation", Family: Single, Group: Losses},
	{ID: FluxSwing, Key: "flux_swing_pp_t", Unit: "T", Symbol: "ΔB", Meaning: "peak-to-peak flux density in the core", Source: "volt-seconds over turns and area", Family: Single, Group: Losses},
	{ID: OutputCapacitorLoss, Key: "output_capacitor_loss_w", Unit: "W", Symbol: "Pco", Meaning: "loss of each output bank", Source: "ESR Irms²", Family: PerOutputBank, Group: Losses},
	{ID: InputCapacitorLoss, Key: "input_capacitor_loss_w", Unit: "W", Symbol: "Pci", Meaning: "loss of each input bank", Source: "ESR Irms²", Family: PerInputBank, Group: Losses},
	{ID: ControllerLoss, Key: "controller_loss_w", Unit: "W", Symbol: "Pctl", Meaning: "loss in the controller: quiescent, gate drive, auxiliary", Source: "sum of its items", Family: Single, Group: Losses},
	{ID: BoardLoss, Key: "board_loss_w", Unit: "W", Symbol: "Pb", Meaning: "loss in copper paths", Source: "R I²", Family: Single, Group: Losses},
	{ID: HighSideJunction, Key: "high_side_junction_degc", Unit: "Cel", Symbol: "Tj,hs", Meaning: "high-side junction temperature", Source: "electro-thermal equilibrium", Family: Single, Group: Losses},
	{ID: LowSideJunction, Key: "low_side_junction_degc", Unit: "Cel", Symbol: "Tj,ls", Meaning: "low-side junction temperature", Source: "electro-thermal equilibrium", Family: Single, Group: Losses},
	{ID: DiodeJunction, Key: "diode_junction_degc", Unit: "Cel", Symbol: "Tj,d", Meaning: "diode junction temperature", Source: "electro-thermal equilibrium", Family: Single, Group: Losses},
	{ID: InductorWinding, Key: "inductor_winding_degc", Unit: "Cel", Symbol: "Tl", Meaning: "winding and core temperature", Source: "electro-thermal equilibrium", Family: Single, Group: Losses},
	{ID: ControllerJunction, Key: "controller_junction_degc", Unit: "Cel", Symbol: "Tj,ctl", Meaning: "controller junction temperature", Source: "electro-thermal equilibrium", Family: Single, Group: Losses},
	{ID: OutputCapacitorTemperature, Key: "output_capacitor_degc", Unit: "Cel", Symbol: "Tco", Meaning: "core temperature of each output bank's pieces", Source: "electro-thermal equilibrium", Family: PerOutputBank, Group: Losses},
	{ID: InputCapacitorTemperature, Key: "input_capacitor_degc", Unit: "Cel", Symbol: "Tci", Meaning: "core temperature of each input bank's pieces", Source: "electro-thermal equilibrium", Family: PerInputBank, Group: Losses},
	{ID: OutputCapacitorLife, Key: "output_capacitor_life_s", Unit: "s", Symbol: "Lco", Meaning: "expected life of each output bank", Source: "doubling per 10 K with ripple heating", Family: PerOutputBank, Group: Losses},
	{ID: InputCapacitorLife, Key: "input_capacitor_life_s", Unit: "s", Symbol: "Lci", Meaning: "expected life of each input bank", Source: "doubling per 10 K with ripple heating", Family: PerInputBank, Group: Losses},
	{ID: ThermalFeedback, Key: "thermal_feedback_ratio", Unit: "1", Symbol: "ρ", Meaning: "spectral radius of thermal resistance times power sensitivity; 1 is runaway", Source: "Rth dP/dT at the equilibrium", Family: Single, Group: Losses},
	{ID: Crossover, Key: "crossover_hz", Unit: "Hz", Symbol: "fc", Meaning: "highest frequency at which the loop gain falls through 1", Source: "search on the sampled-data loop gain", Family: Single, Group: Loop},
	{ID: PhaseMargin, Key: "phase_margin_deg", Unit: "deg", Symbol: "φm", Meaning: "least phase margin over all crossovers", Source: "180° plus the phase of the loop gain", Family: Single, Group: Loop},
	{ID: GainMargin, Key: "gain_margin_db", Unit: "dB", Symbol: "GM", Meaning: "least gain margin over all phase crossings; 60 stands for 60 dB or more, no phase crossing included; not positive for an unstable loop", Source: "−20 log |T| at −180°", Family: Single, Group: Loop},
	{ID: ModulusMargin, Key: "modulus_margin_ratio", Unit: "1", Symbol: "|1+T|min", Meaning: "least distance of the loop gain to −1; negative for an unstable loop", Source: "minimum over frequency", Family: Single, Group: Loop},
	{ID: LoadStepDeviation, Key: "load_step_deviation_v", Unit: "V", Symbol: "ΔVstep", Meaning: "greatest deviation after the load step", Source: "cycle-by-cycle closed loop", Family: Single, Group: Transient},
	{ID: LoadStepRecovery, Key: "load_step_recovery_s", Unit: "s", Symbol: "trec", Meaning: "time until the output stays in its band after the load step", Source: "cycle-by-cycle closed loop", Family: Single, Group: Transient},
	{ID: LoadStepPeak, Key: "load_step_inductor_peak_a", Unit: "A", Symbol: "Ipk,step", Meaning: "greatest inductor current after the load step", Source: "cycle-by-cycle closed loop", Family: Single, Group: Transient},
}
