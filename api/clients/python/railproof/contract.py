"""Types and operations of the contract. Written by api/clients/generate; not edited by hand."""

from abc import ABC, abstractmethod
from typing import Any, Dict, List, Literal, Mapping, NotRequired, Optional, TypedDict, Union, cast

CONTRACT_VERSION = '1.0.0'


class Spread(TypedDict):
    """A value with its tolerance, in the unit of the field that it stands in. The bounds of that field hold for typ, min and max. {min, max} without typ has typ at the midpoint."""

    typ: NotRequired[float]  # Typical value.
    tol: NotRequired[float]  # [1] Symmetric relative tolerance: the ends are typ -+ |typ| tol. Not with min or max, not on temperatures, not where typ is 0.
    min: NotRequired[float]  # Least value; typ if absent.
    max: NotRequired[float]  # Greatest value; typ if absent.
    distribution: NotRequired[Literal['uniform', 'normal', 'triangular']]  # Law between the ends; uniform if absent. normal: mode typ, sigma = (max - min)/6, truncated at the ends. triangular: mode typ.
    group: NotRequired[str]  # Spreads of one group share one coordinate: they move together.
    match_tol: NotRequired[float]  # [1] Relative residual of a group's member, independent of the others.


class Thermal(TypedDict):
    """A part's path to ambient."""

    junction_to_ambient_k_per_w: NotRequired[Union[float, 'Spread']]  # [K/W] Thermal resistance from the part (junction, winding or core) to ambient, on the board it is used on. Default by kind of part: MOSFET 50, diode 60, inductor 30, capacitor 40, controller 50.


class MosfetRating(TypedDict):
    """Absolute maximum ratings. An absent rating is unknown: neither zero nor infinite."""

    drain_source_v: NotRequired[float]  # [V]
    gate_source_v: NotRequired[float]  # [V]
    drain_current_a: NotRequired[float]  # [A] Continuous.
    junction_degc: NotRequired[float]  # [Cel]


class Mosfet(TypedDict):
    """One switch of the half bridge; every value is of one phase."""

    on_resistance_ohm: Union[float, 'Spread']  # [Ohm] At 25 degC and the controller's drive voltage.
    on_resistance_temp: NotRequired[List[Dict[str, Any]]]  # Multiplier of the on-resistance over junction temperature; beyond the ends the last slope goes on. Default: constant 1. Strictly increasing in the first; linear in between.
    on_resistance_drive: NotRequired[List[Dict[str, Any]]]  # Multiplier of the on-resistance over gate drive voltage. Default: constant 1. Strictly increasing in the first; linear in between.
    gate_charge_c: NotRequired[Union[float, 'Spread']]  # [C] Total gate charge at the drive voltage. Default 0, reported: no gate-drive loss.
    gate_switch_charge_c: NotRequired[Union[float, 'Spread']]  # [C] Qgs2 + Qgd at gate_switch_charge_at_v; scaled with the square root of the voltage. Default 0, reported: no overlap loss.
    gate_switch_charge_at_v: NotRequired[float]  # [V] Test voltage of the switching gate charge. Default 20.
    plateau_v: NotRequired[Union[float, 'Spread']]  # [V] Gate plateau voltage. Default 2.5.
    internal_gate_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] Internal gate resistance. Default 1.
    output_charge_c: NotRequired[Union[float, 'Spread']]  # [C] Output charge at output_charge_at_v; scaled with the square root of the voltage unless output_charge_table is given. Default 0, reported.
    output_charge_at_v: NotRequired[float]  # [V] Test voltage of the output charge. Default 20.
    output_charge_table: NotRequired[List[Dict[str, Any]]]  # Output charge over drain-source voltage. Default: square-root scaling. Strictly increasing in the first; linear in between.
    recovery_charge_c: NotRequired[Union[float, 'Spread']]  # [C] Reverse recovery charge of the body diode. Default 0, reported.
    body_diode_v: NotRequired[Union[float, 'Spread']]  # [V] Forward drop of the body diode during dead time. Default 0.85.
    rating: NotRequired['MosfetRating']
    thermal: NotRequired['Thermal']
    part_number: NotRequired[str]  # The caller's number for the part; echoed, not interpreted.
    assumed: NotRequired[bool]  # A placeholder that sizing proposed; listed in the assumptions.


class DiodeRating(TypedDict):
    """Absolute maximum ratings. An absent rating is unknown."""

    reverse_v: NotRequired[float]  # [V]
    forward_a: NotRequired[float]  # [A] Mean forward current.
    junction_degc: NotRequired[float]  # [Cel]


class Diode(TypedDict):
    """Rectifier of a diode-rectified stage."""

    threshold_v: Union[float, 'Spread']  # [V] Threshold of the forward characteristic at 25 degC.
    slope_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] Slope resistance of the forward characteristic. Default 0, reported.
    threshold_temp_v_per_k: NotRequired[Union[float, 'Spread']]  # [V/K] Temperature coefficient of the threshold. Default -0.0012.
    junction_charge_c: NotRequired[Union[float, 'Spread']]  # [C] Junction charge at junction_charge_at_v. Default 0, reported.
    junction_charge_at_v: NotRequired[float]  # [V] Test voltage of the junction charge. Default 20.
    recovery_charge_c: NotRequired[Union[float, 'Spread']]  # [C] Reverse recovery charge. Default 0, true of a Schottky diode.
    leakage: NotRequired[List[Dict[str, Any]]]  # Reverse current over junction temperature, strictly increasing in temperature, linear in the logarithm of the current; beyond the ends the last slope goes on. Default: no leakage.
    rating: NotRequired['DiodeRating']
    thermal: NotRequired['Thermal']
    part_number: NotRequired[str]  # The caller's number for the part; echoed, not interpreted.
    assumed: NotRequired[bool]  # A placeholder that sizing proposed; listed in the assumptions.


class Steinmetz(TypedDict):
    """Steinmetz coefficients in SI units: sine, amplitude of flux density, Hz, T, W/m3. Coefficients in kHz, mT or kW/m3 must be converted first."""

    k: Union[float, 'Spread']  # [W/m3] Loss coefficient: p = k f^alpha B^beta in W/m3 with f in Hz and B in T, for a SINE and the AMPLITUDE of B, at the temperature where core.temp is 1. A published k_i (improved generalised Steinmetz) typed here is about 15 times wrong, a k for peak-to-peak flux about 5 times.
    alpha: float  # [1] Exponent of frequency.
    beta: float  # [1] Exponent of flux density.


class Core(TypedDict):
    """What core loss is computed from. Without it no core loss is computed, and the answer says so."""

    steinmetz: 'Steinmetz'
    turns: int  # Turns of the winding.
    area_m2: float  # [m2] Effective cross-section.
    volume_m3: float  # [m3] Effective volume.
    temp: NotRequired[List[Dict[str, Any]]]  # Multiplier of the core loss over core temperature. Default: constant 1. Strictly increasing in the first; linear in between.
    band: NotRequired[Dict[str, Any]]  # Uncertainty of the core-loss model.


class InductorRating(TypedDict):
    """Limits of the data sheet. An absent rating is unknown."""

    saturation_a: NotRequired[float]  # [A] Peak.
    heating_a: NotRequired[float]  # [A] RMS.
    winding_degc: NotRequired[float]  # [Cel]


class Inductor(TypedDict):
    """Inductor of one phase."""

    inductance_h: Union[float, 'Spread']  # [H] Incremental inductance at zero current.
    inductance_at_current: NotRequired[List[Dict[str, Any]]]  # Incremental inductance over direct current, relative to the value at zero; beyond the end it goes on falling (floor 0.1). Default: constant 1. Strictly increasing in the first; linear in between.
    dc_resistance_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] Winding resistance at 25 degC. Default 0, reported.
    ac_resistance_ratio: NotRequired[Union[float, 'Spread']]  # [1] AC over DC resistance at the switching frequency. Default 1.
    core: NotRequired['Core']
    rating: NotRequired['InductorRating']
    thermal: NotRequired['Thermal']
    part_number: NotRequired[str]  # The caller's number for the part; echoed, not interpreted.
    assumed: NotRequired[bool]  # A placeholder that sizing proposed; listed in the assumptions.


class CapacitorRating(TypedDict):
    """Limits of the data sheet, per piece. An absent rating is unknown."""

    voltage_v: NotRequired[float]  # [V]
    ripple_current_a: NotRequired[float]  # [A] RMS.
    temperature_degc: NotRequired[float]  # [Cel]


class CapacitorLife(TypedDict):
    """Endurance statement of an electrolytic capacitor."""

    rated_s: NotRequired[float]  # [s] Endurance at the rated temperature and ripple current.
    rated_rise_k: NotRequired[float]  # [K] Rise of the core at the rated ripple current. Default 5.
    frequency_factor_ratio: NotRequired[float]  # [1] Ripple-current multiplier at the switching frequency. Default 1.


class Capacitor(TypedDict):
    """A bank of equal capacitors; every value is of one piece. One spread moves all pieces of the bank."""

    capacitance_f: Union[float, 'Spread']  # [F] Of one piece at zero bias, 25 degC, new.
    count: NotRequired[int]  # Equal pieces in parallel. Default 1.
    esr_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] Series resistance of one piece at the switching frequency and 25 degC. Default 0.003.
    esl_h: NotRequired[Union[float, 'Spread']]  # [H] Series inductance of one piece. Default 0, reported.
    capacitance_at_bias: NotRequired[List[Dict[str, Any]]]  # Multiplier of the small-signal capacitance over direct voltage; beyond the end it goes on falling (floor 0.1). Default: constant 1. Strictly increasing in the first; linear in between.
    capacitance_temp: NotRequired[List[Dict[str, Any]]]  # Multiplier of the capacitance over temperature. Default: constant 1. Strictly increasing in the first; linear in between.
    esr_temp: NotRequired[List[Dict[str, Any]]]  # Multiplier of the series resistance over temperature. Default: constant 1. Strictly increasing in the first; linear in between.
    ageing: NotRequired[List[Dict[str, Any]]]  # Multipliers over age (0 new, 1 end of life), strictly increasing in age. Default: none.
    kind: NotRequired[Literal['ceramic-class-1', 'ceramic-class-2', 'aluminium-electrolytic', 'aluminium-polymer', 'tantalum-solid', 'tantalum-polymer', 'film']]  # Dielectric. Decides life model and rules.
    rating: NotRequired['CapacitorRating']
    life: NotRequired['CapacitorLife']
    thermal: NotRequired['Thermal']
    part_number: NotRequired[str]  # The caller's number for the part; echoed, not interpreted.
    assumed: NotRequired[bool]  # A placeholder that sizing proposed; listed in the assumptions.


class ControllerRating(TypedDict):
    """Absolute maximum ratings. An absent rating is unknown."""

    input_v: NotRequired[float]  # [V]
    junction_degc: NotRequired[float]  # [Cel]


class Controller(TypedDict):
    """Drives the switches and sets timing limits."""

    drive_v: NotRequired[Union[float, 'Spread']]  # [V] Gate drive voltage. Default 5.
    gate_on_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] Driver plus external resistance while turning on. Default 2.
    gate_off_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] The same while turning off. Default 1.
    dead_time_s: NotRequired[Union[float, 'Spread']]  # [s] At each edge. Default 0, reported.
    min_on_time_s: NotRequired[Union[float, 'Spread']]  # [s] Least on-time. Default 0, reported.
    min_off_time_s: NotRequired[Union[float, 'Spread']]  # [s] Least off-time. Default 0, reported.
    max_duty_ratio: NotRequired[Union[float, 'Spread']]  # [1] Greatest duty ratio. Default 1.
    quiescent_current_a: NotRequired[Union[float, 'Spread']]  # [A] Drawn from the input. Default 0, reported.
    drive_supply: NotRequired[Literal['input', 'external', 'output']]  # Where the gate charge comes from: linear from the input, a supply at the drive voltage, or the stage's own output. Default input.
    auxiliary_power_w: NotRequired[Union[float, 'Spread']]  # [W] Drawn from the input besides. Default 0.
    rating: NotRequired['ControllerRating']
    thermal: NotRequired['Thermal']
    part_number: NotRequired[str]  # The caller's number for the part; echoed, not interpreted.
    assumed: NotRequired[bool]  # A placeholder that sizing proposed; listed in the assumptions.


class Modulator(TypedDict):
    """Turns the control voltage into a duty ratio."""

    mode: Literal['voltage', 'peak-current']  # What the duty ratio is compared against.
    ramp_v: NotRequired[Union[float, 'Spread']]  # [V] Peak-to-peak ramp of voltage mode; with feed-forward, at feed_forward_at_v. Required for voltage mode.
    feed_forward: NotRequired[bool]  # The ramp is proportional to the input voltage. Default false.
    feed_forward_at_v: NotRequired[float]  # [V] Input voltage at which ramp_v holds.
    sense_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] Current sense gain, volts at the comparator per ampere. Required for peak current mode.
    slope_v_per_s: NotRequired[Union[float, 'Spread']]  # [V/s] Slope compensation at the comparator. Default 0.
    delay_s: NotRequired[Union[float, 'Spread']]  # [s] Comparator and driver delay. Default 0, reported.
    current_limit_a: NotRequired[float]  # [A] Peak inductor current of one phase, cycle by cycle: the greatest that the limit lets pass, its own tolerance included.


class Compensator(TypedDict):
    """Error amplifier with its network; R1 is the upper feedback resistor."""

    type: Literal['op-amp-1', 'op-amp-2', 'op-amp-3', 'transconductance-2', 'transconductance-3']  # Amplifier and order of its network.
    feedback_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] R2 in the feedback path, or Rz of a transconductance amplifier.
    feedback_f: NotRequired[Union[float, 'Spread']]  # [F] C1 in series with it, or Cz.
    shunt_f: NotRequired[Union[float, 'Spread']]  # [F] C2 across both, or Cp. Default: none.
    lead_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] R3 in series with the lead capacitor, across the upper divider resistor.
    lead_f: NotRequired[Union[float, 'Spread']]  # [F] C3 across the upper divider resistor.
    gain_bandwidth_hz: NotRequired[Union[float, 'Spread']]  # [Hz] Unity-gain frequency of the op-amp. Default: infinite, reported.
    open_loop_gain_ratio: NotRequired[Union[float, 'Spread']]  # [1] Direct gain of the op-amp. Default: infinite, reported.
    transconductance_s: NotRequired[Union[float, 'Spread']]  # [S] Of a transconductance amplifier (siemens).
    output_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] Output resistance of a transconductance amplifier. Default: infinite, reported.


class Feedback(TypedDict):
    """Reference and divider that set the output voltage."""

    reference_v: Union[float, 'Spread']  # [V] Reference voltage.
    upper_ohm: Union[float, 'Spread']  # [Ohm] From the output to the feedback node.
    lower_ohm: Union[float, 'Spread']  # [Ohm] From the feedback node to ground.


class Board(TypedDict):
    """Copper paths of the board."""

    input_path_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] From the source to the input capacitors, at 25 degC. Default 0.
    output_path_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] From the output capacitors to the load, at 25 degC. Default 0.
    switch_node_path_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] In series with the inductor of one phase, at 25 degC. Default 0.


class PhaseOverride(TypedDict):
    """Values of one phase that differ from the stage."""

    inductance_h: NotRequired[Union[float, 'Spread']]  # [H] In place of the stage's.
    dc_resistance_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] In place of the stage's.
    high_side_on_resistance_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] In place of the stage's.
    low_side_on_resistance_ohm: NotRequired[Union[float, 'Spread']]  # [Ohm] In place of the stage's.


class ThermalCoupling(TypedDict):
    """Mutual thermal resistance of two parts."""

    a: 'PartRole'
    b: 'PartRole'
    coupling_k_per_w: float  # [K/W] Rise of one part per watt in the other.


class Stage(TypedDict):
    """A power stage with its parts, controller and feedback. low_side belongs to a synchronous stage, diode to a diode-rectified one. Every number marked x-spread may be a spread, which is then a corner variable named by its pointer."""

    name: NotRequired[str]  # Name of the rail.
    rectifier: Literal['synchronous', 'synchronous-emulated', 'diode']  # synchronous always conducts both ways; synchronous-emulated blocks reverse current; diode has threshold and slope.
    phase_count: NotRequired[int]  # Interleaved phases; parts describe one phase. Default 1.
    switching_frequency_hz: Union[float, 'Spread']  # [Hz] Of each phase.
    high_side: 'Mosfet'
    low_side: NotRequired['Mosfet']
    diode: NotRequired['Diode']
    inductor: 'Inductor'
    output_capacitors: List['Capacitor']  # Banks at the output.
    input_capacitors: NotRequired[List['Capacitor']]  # Banks at the input.
    controller: NotRequired['Controller']
    modulator: NotRequired['Modulator']
    compensator: NotRequired['Compensator']
    feedback: NotRequired['Feedback']
    board: NotRequired['Board']
    phases: NotRequired[List['PhaseOverride']]  # Deviations of single phases, in order; absent: equal phases.
    thermal_couplings: NotRequired[List['ThermalCoupling']]  # Mutual thermal resistances. Default: none.


class Load(TypedDict):
    """Constant current plus resistor, both optional; none is no load."""

    current_a: NotRequired[float]  # [A] Constant current.
    resistance_ohm: NotRequired[float]  # [Ohm] Resistor beside it.


class Control(TypedDict):
    """What sets the duty ratio: exactly one of these."""

    regulate_to_v: NotRequired[float]  # [V] Mean output voltage held at this value.
    regulate_by: NotRequired[Literal['feedback']]  # Mean output voltage set by reference and divider.
    duty_ratio: NotRequired[float]  # [1] Fixed duty ratio.


class Point(TypedDict):
    """One operating point. Without control the stage is regulated by its feedback."""

    id: NotRequired[str]  # The caller's label; echoed.
    input_v: float  # [V] At the source.
    source_ohm: NotRequired[float]  # [Ohm] Resistance of the source, before the board's input path. Default 0.
    load: NotRequired['Load']
    ambient_degc: float  # [Cel]
    age_ratio: NotRequired[float]  # [1] 0 new, 1 end of life. Default 0.
    part_temperature_degc: NotRequired[float]  # [Cel] Every part is held there, without thermal coupling. Absent: electro-thermal equilibrium.
    asked_v: NotRequired[float]  # [V] Output voltage that output_error_ratio refers to. Default: what the control asks for, by feedback what the divider's typical values set.
    control: NotRequired['Control']


PartRole = Literal['high_side', 'low_side', 'diode', 'inductor', 'controller', 'board', 'output_capacitors/0', 'output_capacitors/1', 'output_capacitors/2', 'output_capacitors/3', 'output_capacitors/4', 'output_capacitors/5', 'input_capacitors/0', 'input_capacitors/1', 'input_capacitors/2', 'input_capacitors/3', 'input_capacitors/4', 'input_capacitors/5']


class Conditions(TypedDict):
    """Ranges over which a stage must work. They are corners, not statistics: they carry no distribution. Without control the stage is regulated by its feedback."""

    input_v: Dict[str, Any]
    source_ohm: NotRequired[float]  # [Ohm] Default 0.
    load: NotRequired[Dict[str, Any]]  # As in a point, as ranges.
    ambient_degc: Dict[str, Any]
    age_ratio: NotRequired[Dict[str, Any]]  # Default: new throughout.
    control: NotRequired['Control']


class Limit(TypedDict):
    """A limit on a quantity, in its unit; min, max or both."""

    quantity: str  # Key of a quantity; one bank of a per-bank quantity is named as in output_capacitor_rms_a/0.
    min: NotRequired[float]  # Least value allowed.
    max: NotRequired[float]  # Greatest value allowed.
    at: NotRequired[Literal['worst', 'nominal']]  # Where it must hold. Default worst.
    full_load: NotRequired[bool]  # It must hold at the greatest load only, in the worst of the other conditions. In corners such a limit is looked at by extreme value; drawn units and their yield leave it out.


class Requirement(TypedDict):
    """What a rail must do."""

    name: NotRequired[str]
    input: Dict[str, Any]
    output: Dict[str, Any]
    load: Dict[str, Any]
    ambient: Dict[str, Any]
    rectifier: NotRequired[Literal['synchronous', 'synchronous-emulated', 'diode']]  # Default synchronous.
    phase_count: NotRequired[int]  # Default 1.
    switching_frequency_hz: Union[float, 'FrequencyRange']  # [Hz] Fixed, or a range to sweep.
    targets: NotRequired['Targets']


class FrequencyRange(TypedDict):
    """Range of switching frequencies to sweep."""

    min: float  # [Hz]
    max: float  # [Hz]


class Targets(TypedDict):
    """Limits that the stage is sized for. What is absent and has no default is not asked."""

    inductor_ripple_ratio: NotRequired[float]  # [1] Peak-to-peak inductor ripple over the greatest load current of one phase. Default 0.3.
    output_ripple_pp_v: NotRequired[float]  # [V] Peak to peak. Default: 1 % of the output voltage.
    input_ripple_pp_v: NotRequired[float]  # [V] Peak to peak. Default: 2 % of the least input voltage.
    continuous_down_to_a: NotRequired[float]  # [A] Load down to which conduction must be continuous. 0: not asked.
    load_step: NotRequired[Dict[str, Any]]
    hold_up: NotRequired[Dict[str, Any]]
    efficiency_ratio: NotRequired[float]  # [1] Least, at the greatest load. 0: not asked.
    junction_degc: NotRequired[float]  # [Cel] Greatest junction temperature.
    life_s: NotRequired[float]  # [s] Least life of the capacitors. 0: not asked.


class SteadyStateRequest(TypedDict):
    stage: 'Stage'
    point: 'Point'
    waveform_points: NotRequired[int]  # Instants at which waveforms are given, corners besides; 0 (default): none.


class LossesRequest(TypedDict):
    """Exactly one of point, points and grid."""

    stage: 'Stage'
    point: NotRequired['Point']
    points: NotRequired[List['Point']]  # A list of points.
    grid: NotRequired['GridRequest']
    quantities: NotRequired[List[str]]  # Quantities of a grid answer, per-bank ones by their bare key. Default: efficiency_ratio, loss_total_w, output_mean_v, and the temperatures of switches and inductor.


class GridRequest(TypedDict):
    """Every combination, at most 20000."""

    input_v: List[float]  # Values of the input voltage.
    load_current_a: List[float]  # Values of the load current.
    ambient_degc: List[float]  # Values of the ambient temperature.
    source_ohm: NotRequired[float]  # [Ohm] Default 0.
    age_ratio: NotRequired[float]  # [1] Default 0.
    part_temperature_degc: NotRequired[float]  # [Cel] As in a point.
    control: NotRequired['Control']


class SizingChoices(TypedDict):
    """What the draft stage is made of."""

    inductor_series: NotRequired[Literal['E3', 'E6', 'E12', 'E24', 'E48', 'E96', 'E192']]  # Default E6.
    capacitor_series: NotRequired[Literal['E3', 'E6', 'E12', 'E24', 'E48', 'E96', 'E192']]  # Default E6.
    divider_series: NotRequired[Literal['E3', 'E6', 'E12', 'E24', 'E48', 'E96', 'E192']]  # Default E96.
    reference_v: NotRequired[float]  # [V] Reference of the controller. Default 0.8.
    lower_ohm: NotRequired[float]  # [Ohm] Lower divider resistor. Default 10e3.
    min_on_time_s: NotRequired[float]  # [s] Default 1e-7.
    min_off_time_s: NotRequired[float]  # [s] Default 2e-7.
    max_duty_ratio: NotRequired[float]  # [1] Default 0.98.
    output_capacitor_kind: NotRequired[Literal['ceramic-class-1', 'ceramic-class-2', 'aluminium-electrolytic', 'aluminium-polymer', 'tantalum-solid', 'tantalum-polymer', 'film']]  # Default ceramic-class-2.
    input_capacitor_kind: NotRequired[Literal['ceramic-class-1', 'ceramic-class-2', 'aluminium-electrolytic', 'aluminium-polymer', 'tantalum-solid', 'tantalum-polymer', 'film']]  # Default ceramic-class-2.
    sweep_count: NotRequired[int]  # Frequencies of a sweep, spaced in equal ratios. Default 9.


class SizingRequest(TypedDict):
    requirement: 'Requirement'
    choices: NotRequired['SizingChoices']


class CornersRequest(TypedDict):
    """Variables are the spreads of the stage, named by their pointers; conditions are ranges beside them. Loop quantities are evaluated only when they are asked for."""

    stage: 'Stage'
    conditions: 'Conditions'
    limits: NotRequired[List['Limit']]  # One on a quantity of transients is left open, with a warning: the verdict is incomplete at best.
    quantities: NotRequired[List[str]]  # Further quantities to report, without a limit.
    methods: NotRequired[List[Literal['extreme-value', 'root-sum-square', 'monte-carlo', 'attribution']]]  # Default: extreme-value, root-sum-square and monte-carlo.
    samples: NotRequired[int]  # Built units to draw. Default 10000.
    seed: NotRequired[int]  # Default 1; echoed.
    sampling: NotRequired[Literal['independent', 'sobol', 'latin-hypercube']]  # Default independent. sobol runs 16 scrambles of a power of two of points; latin-hypercube runs 16 replicates.
    first_sample: NotRequired[int]  # Number of the first sample, so that sample k can be asked for again alone. Default 0. Independent sampling only.
    condition_corners: NotRequired[List['CornerPoint']]  # Condition corners at which every unit is evaluated. Default: the worst ones per limited quantity from the extreme-value pass.
    confidence_ratio: NotRequired[float]  # [1] Confidence of intervals and of the Wilks sample size. Default 0.95.
    coverage_ratio: NotRequired[float]  # [1] Share of units that the Wilks bound covers. Default 0.95.
    quantiles: NotRequired[List[float]]  # Besides 0.00135, 0.01, 0.5, 0.99 and 0.99865.
    histogram_bins: NotRequired[int]  # Bins of each histogram. Default 40; 0: none.
    worst_samples: NotRequired[int]  # How many of the worst samples to give per limited quantity. Default 3.
    attribution_samples: NotRequired[int]  # Base sample of the Sobol indices, a power of two. Default 4096.
    model_bands: NotRequired[bool]  # Uncertainty bands of the loss models become variables. Default false.
    biases: NotRequired[List['Bias']]  # Drifts of known sign that no part model covers.
    stages: NotRequired[bool]  # Give the stage of each worst point with its values put in, ready to post. Default false.


class CornerPoint(TypedDict):
    """One combination of conditions."""

    input_v: float  # [V]
    load_current_a: NotRequired[float]  # [A]
    load_resistance_ohm: NotRequired[float]  # [Ohm]
    ambient_degc: float  # [Cel]
    age_ratio: NotRequired[float]  # [1]


class Bias(TypedDict):
    """A drift that adds linearly, apart from the tolerances."""

    pointer: str  # Number of the stage that drifts, such as /stage/feedback/reference_v.
    drift_ratio: float  # [1] Relative drift at end of life, with its sign.
    why: NotRequired[str]


class LoopSynthesis(TypedDict):
    """What the compensator must achieve at the first point."""

    type: Literal['op-amp-1', 'op-amp-2', 'op-amp-3', 'transconductance-2', 'transconductance-3']
    crossover_hz: float  # [Hz]
    phase_margin_deg: float  # [deg]
    series: NotRequired[Literal['E3', 'E6', 'E12', 'E24', 'E48', 'E96', 'E192']]  # Of the resistors. Default E24. Capacitors keep to it up to E24.
    gain_bandwidth_hz: NotRequired[float]  # [Hz] Of the op-amp. Default: that of the stage's compensator if it is one, else infinite, reported.
    open_loop_gain_ratio: NotRequired[float]  # [1] Of the op-amp. Default likewise.
    transconductance_s: NotRequired[float]  # [S] Of a transconductance amplifier (siemens). Default: that of the stage's compensator if it is one; else required.
    output_ohm: NotRequired[float]  # [Ohm] Of a transconductance amplifier. Default as the gain-bandwidth of an op-amp.


class InputFilter(TypedDict):
    """Filter between source and input capacitors, which stay beside its own capacitor; values are totals. Damped across the inductor or across the capacitor, not both."""

    inductance_h: float  # [H]
    dc_resistance_ohm: NotRequired[float]  # [Ohm]
    capacitance_f: float  # [F]
    esr_ohm: float  # [Ohm] Of the capacitor.
    damping_capacitance_f: NotRequired[float]  # [F] In series with damping_ohm, across the capacitor.
    damping_inductance_h: NotRequired[float]  # [H] In series with damping_ohm, across the inductor.
    damping_ohm: NotRequired[float]  # [Ohm]


class FrequencyGrid(TypedDict):
    """Frequencies of the curves."""

    from_hz: NotRequired[float]  # [Hz] Default: a ten-thousandth of the switching frequency.
    to_hz: NotRequired[float]  # [Hz] At most, and by default, half the rate at which the comparators decide: half the switching frequency times the phases.
    count: NotRequired[int]  # Spaced in equal ratios. Default 300.


class LoopGainRequest(TypedDict):
    """Exactly one of point and points, at which the output is regulated. With synthesis, the compensator of the stage is replaced, for the first point; without, the stage must have one. The stage needs modulator and feedback. The source with its series resistance and the input banks, or with the filter, is held against the loop where one is given."""

    stage: 'Stage'
    point: NotRequired['Point']
    points: NotRequired[List['Point']]
    synthesis: NotRequired['LoopSynthesis']
    input_filter: NotRequired['InputFilter']
    frequencies: NotRequired['FrequencyGrid']
    curves: NotRequired[bool]  # Give the curves. Default true.


class TransientEvent(TypedDict):
    """Exactly one of these."""

    load_step: NotRequired[Dict[str, Any]]
    input_step: NotRequired[Dict[str, Any]]
    reference_step: NotRequired[Dict[str, Any]]
    start_up: NotRequired[Dict[str, Any]]


class TransientsRequest(TypedDict):
    """The stage needs modulator, compensator and feedback, by which the point is regulated. Inductance, capacitances and temperatures stay those of the point."""

    stage: 'Stage'
    point: 'Point'
    event: 'TransientEvent'
    duration_s: NotRequired[float]  # [s] Time that is followed after the event, at most 500,000 periods. Default: 500 periods after its last change.
    lead_s: NotRequired[float]  # [s] Steady time before the event that is shown; none before a start. Default: 5 periods.
    band_ratio: NotRequired[float]  # [1] Half width of the band of recovery, over the voltage that the divider sets; around the mean output that the loop brings about. Default 0.01.
    waveform_points: NotRequired[int]  # Instants at which waveforms are given, extremes kept; 0: none. Default 1000.


class Rule(TypedDict):
    """One design rule."""

    id: str
    title: str
    severity: Literal['error', 'warning', 'note']  # A failed error or warning fails the check, an error that was not evaluated leaves it incomplete; a note decides nothing.
    scope: List[Literal['stage', 'high_side', 'low_side', 'diode', 'inductor', 'controller', 'output_capacitors/*', 'input_capacitors/*']]  # Parts it applies to; it is evaluated once per part, capacitors per bank.
    when: NotRequired[str]  # Expression (Common Expression Language): does the rule apply? Default true.
    value: Union[float, str]  # Expression of the number that is judged.
    at_most: NotRequired[Union[float, str]]  # Expression of its upper limit.
    at_least: NotRequired[Union[float, str]]  # Expression of its lower limit; exactly one of the two.
    unit: str  # UCUM code of the values beside it.
    needs: NotRequired[List[str]]  # Facts without which there is no verdict, though the expressions do not use them.
    at: NotRequired[str]  # Place of the finding below its part, such as rating/voltage_v.
    message: str  # Template: {value}, {limit}, {unit}, {margin}, {part}, {rule}.
    basis: str  # Where the limit stands, or that it is common practice.


class RuleParameter(TypedDict):
    """A constant of a pack that derived packs may set."""

    value: float
    least: float
    greatest: float
    meaning: str


class RuleOverride(TypedDict):
    """A change to an inherited rule or parameter; every answer names it."""

    rule: NotRequired[str]  # Rule of the extended pack.
    parameter: NotRequired[str]  # Or a parameter of it.
    limit: NotRequired[Union[float, str]]  # In place of the limit of the rule.
    severity: NotRequired[Literal['error', 'warning', 'note']]
    enabled: NotRequired[bool]  # false switches the rule off.
    value: NotRequired[float]  # Of the parameter.
    reason: str


class RulePack(TypedDict):
    """Design rules as data."""

    id: str
    title: str
    edition: str
    provenance: str
    extends: NotRequired[str]  # Pack that it builds on.
    parameters: NotRequired[Dict[str, 'RuleParameter']]  # By name.
    rules: NotRequired[List['Rule']]
    overrides: NotRequired[List['RuleOverride']]


class PackChoice(TypedDict):
    """A pack by its id, or given here: exactly one."""

    id: NotRequired[str]  # A pack that the service has.
    pack: NotRequired['RulePack']


class Waiver(TypedDict):
    """A deviation that somebody has accepted."""

    rule: str  # Pack and rule: general-practice/inductor-heating.
    pointer: str  # Place of the finding that is waived.
    reason: str
    approved_by: str
    expires_on: str  # Date, YYYY-MM-DD; the last day on which it holds.


class RuleChecksRequest(TypedDict):
    """Conditions default to the ranges of the requirement, from new to the end of life. Rules look at the worst values found over conditions and tolerances. A missing or assumed figure, or one that rests on a table beyond its ends, is not-evaluated, never a pass."""

    stage: 'Stage'
    requirement: 'Requirement'
    conditions: NotRequired['Conditions']
    limits: NotRequired[List['Limit']]  # Checked as rules of their own.
    packs: NotRequired[List['PackChoice']]  # Default: general-practice.
    waivers: NotRequired[List['Waiver']]
    date: NotRequired[str]  # Date to compare waivers with, so that results can be reproduced.


class Replacement(TypedDict):
    """A part for a role; of mosfet, diode, inductor, capacitor and controller exactly the one that the role needs. Data may be partial. Where the present part has a figure, a table or a tolerance that this one leaves out, the present one stands in for the computation, is listed as missing, and the part needs review. Ratings, kind and life are never taken from the present part."""

    id: NotRequired[str]  # The caller's label; echoed.
    role: str  # Role that the part takes.
    mosfet: NotRequired['Mosfet']
    diode: NotRequired['Diode']
    inductor: NotRequired['Inductor']
    capacitor: NotRequired['Capacitor']
    controller: NotRequired['Controller']
    cost: NotRequired[float]  # [1] In any currency, the same for all.
    area_m2: NotRequired[float]  # [m2] Board area.


class RankWeights(TypedDict):
    """Weights of the ranking."""

    loss_ratio: NotRequired[float]  # [1] Default 1.
    temperature_margin_ratio: NotRequired[float]  # [1] Default 1.
    cost_ratio: NotRequired[float]  # [1] Default 0.
    area_ratio: NotRequired[float]  # [1] Default 0.


class SubstitutionsRequest(TypedDict):
    stage: 'Stage'
    requirement: 'Requirement'
    conditions: NotRequired['Conditions']
    limits: NotRequired[List['Limit']]
    packs: NotRequired[List['PackChoice']]  # Default: general-practice.
    waivers: NotRequired[List['Waiver']]
    date: NotRequired[str]  # Date to compare waivers with, so that results can be reproduced.
    replacements: List['Replacement']  # Each is tried alone.
    weights: NotRequired['RankWeights']
    quantities: NotRequired[List[str]]  # Quantities to compare besides the limited ones.


class BomLine(TypedDict):
    line: NotRequired[int]  # Line number of the document.
    designators: List[str]
    count: NotRequired[int]  # Pieces, where the document states them.
    value: NotRequired[str]  # As written: 4u7, 4.7 uF 20% 16 V, 2K2 1 %.
    tolerance: NotRequired[str]
    rating: NotRequired[str]
    part_number: NotRequired[str]
    not_fitted: NotRequired[bool]  # The line stands for nothing on the board.


class BomColumns(TypedDict):
    """Which header names which column."""

    designators: str  # Header of the column with reference designators.
    count: NotRequired[str]  # Header of the column with the number of pieces.
    value: NotRequired[str]  # Header of the column with the value.
    tolerance: NotRequired[str]  # Header of the column with the tolerance.
    rating: NotRequired[str]  # Header of the column with the rating.
    part_number: NotRequired[str]  # Header of the column with the part number.
    not_fitted: NotRequired[str]  # Header of a column in which anything but empty, 0, no, false or fitted means not fitted.


class BomCsv(TypedDict):
    text: str  # RFC 4180, UTF-8 with or without byte order mark.
    delimiter: NotRequired[Literal[',', ';', '\t']]  # Default: found from the header.
    columns: 'BomColumns'


class Bom(TypedDict):
    """Lines, or a CSV document: exactly one."""

    lines: NotRequired[List['BomLine']]
    csv: NotRequired['BomCsv']


class Alternate(TypedDict):
    """A part that was approved for a role."""

    role: str
    part_number: str
    replacement: 'Replacement'


class Rail(TypedDict):
    """A proven rail and the lines it is built of."""

    name: str
    stage: 'Stage'
    requirement: 'Requirement'
    conditions: NotRequired['Conditions']
    bindings: List['Binding']
    roles_without_line: NotRequired[List['BomRole']]  # Roles that no line stands for, such as a compensator or the switches inside the controller. Every other part of the proof that is bound to no designator leaves the rail incomplete.
    designator_ranges: NotRequired[List[Dict[str, Any]]]  # Designators that belong to the rail; unbound lines in them are listed.
    alternates: NotRequired[List['Alternate']]


BomRole = str


class Binding(TypedDict):
    role: 'BomRole'
    designators: List[str]


class BomChecksRequest(TypedDict):
    bom: 'Bom'
    rails: List['Rail']
    packs: NotRequired[List['PackChoice']]  # Default: general-practice.


class ReportsRequest(TypedDict):
    title: NotRequired[str]
    stage: 'Stage'
    requirement: 'Requirement'
    conditions: NotRequired['Conditions']
    limits: NotRequired[List['Limit']]
    packs: NotRequired[List['PackChoice']]  # Default: general-practice.
    waivers: NotRequired[List['Waiver']]
    date: NotRequired[str]  # Date to compare waivers with, so that results can be reproduced.
    sections: NotRequired[List[Literal['requirement', 'stage', 'sizing', 'operating-figures', 'losses', 'worst-case', 'loop', 'transient', 'findings', 'cautions', 'assumptions', 'reproduction']]]  # Default: all that the stage has data for.
    samples: NotRequired[int]  # Of the Monte Carlo in worst-case. Default 10000.
    seed: NotRequired[int]  # Default 1.


class Engine(TypedDict):
    """What computed the answer. The same request gives the same bytes on the same engine."""

    name: str
    version: str
    contract_version: str
    platform: str  # Operating system, architecture and the instruction-set features that change rounding.


class Assumption(TypedDict):
    """A value that was not given, what stood in for it, and how much it matters."""

    pointer: str  # JSON Pointer (RFC 6901) from the root of the request.
    value: NotRequired[float]  # Value used; absent where it is unbounded or no number.
    unit: NotRequired[str]  # UCUM code of the values beside it.
    low: NotRequired[float]  # Least value that the real one may have.
    high: NotRequired[float]  # Greatest.
    why: str
    effect: NotRequired[Dict[str, Any]]  # Computed effect on one named quantity.


class Caution(TypedDict):
    """What in this design can hurt someone or something."""

    code: str
    detail: str
    pointer: NotRequired[str]  # The place it is about, where there is one.
    value: NotRequired[float]
    limit: NotRequired[float]
    unit: NotRequired[str]  # UCUM code of the values beside it.


class Warning(TypedDict):
    """Something about the request that the caller should look at."""

    code: str
    pointer: str  # JSON Pointer (RFC 6901) from the root of the request.
    detail: str


class Equation(TypedDict):
    """One figure, how it follows, and where the formula stands."""

    quantity: str
    formula: str  # In symbols.
    inserted: str  # With the numbers put in.
    value: float
    unit: str  # UCUM code of the values beside it.
    source: str
    pointer: NotRequired[str]  # JSON Pointer (RFC 6901) from the root of the request.


class Quantities(TypedDict):
    """Quantities by key; the dictionary is GET /v1/quantities. A quantity that does not apply to the stage or was not asked for is absent; per-bank ones are arrays in the order of the banks."""

    output_mean_v: NotRequired[float]  # [V] Mean output voltage at the capacitor node.
    output_ripple_pp_v: NotRequired[float]  # [V] Peak-to-peak output voltage at the capacitor node, without series inductance.
    output_ripple_with_esl_pp_v: NotRequired[float]  # [V] Peak-to-peak output voltage including the edge step of the capacitors' series inductance.
    input_ripple_pp_v: NotRequired[float]  # [V] Peak-to-peak voltage at the input capacitors.
    inductor_mean_a: NotRequired[float]  # [A] Mean inductor current of one phase.
    inductor_ripple_pp_a: NotRequired[float]  # [A] Peak-to-peak inductor current of one phase.
    inductor_peak_a: NotRequired[float]  # [A] Greatest inductor current of one phase.
    inductor_valley_a: NotRequired[float]  # [A] Least (most negative) inductor current of one phase.
    inductor_rms_a: NotRequired[float]  # [A] RMS inductor current of one phase.
    high_side_mean_a: NotRequired[float]  # [A] Mean high-side current of one phase.
    high_side_rms_a: NotRequired[float]  # [A] RMS high-side current of one phase.
    rectifier_mean_a: NotRequired[float]  # [A] Mean rectifier current of one phase.
    rectifier_rms_a: NotRequired[float]  # [A] RMS rectifier current of one phase.
    output_capacitor_rms_a: NotRequired[List[float]]  # RMS current of each output capacitor bank.
    input_capacitor_rms_a: NotRequired[float]  # [A] RMS alternating current of all input capacitors together.
    input_capacitor_bank_rms_a: NotRequired[List[float]]  # RMS current of each input capacitor bank.
    circuit_input_mean_a: NotRequired[float]  # [A] Mean current that the switched circuit draws from the bridge voltage.
    duty_ratio: NotRequired[float]  # [1] Fraction of the period in which the switch node is driven high, without dead time.
    dead_time_duty_ratio: NotRequired[float]  # [1] Correction of the duty ratio by dead time.
    energy_balance_ratio: NotRequired[float]  # [1] Residual of input, output and circuit losses, normalised.
    inductance_effective_h: NotRequired[float]  # [H] Inductance of one phase over the actual current swing.
    output_capacitance_effective_f: NotRequired[List[float]]  # Capacitance of each output bank at bias, temperature and age.
    input_capacitance_effective_f: NotRequired[List[float]]  # Capacitance of each input bank at bias, temperature and age.
    bridge_v: NotRequired[float]  # [V] Voltage at the input capacitors, which the switches block.
    on_time_s: NotRequired[float]  # [s] Time for which the high side is commanded on, dead-time correction included.
    off_time_s: NotRequired[float]  # [s] Rest of the period.
    boundary_load_a: NotRequired[float]  # [A] Load current below which conduction becomes discontinuous, or the valley negative.
    load_v: NotRequired[float]  # [V] Mean voltage at the load, after the output path.
    output_error_ratio: NotRequired[float]  # [1] Deviation of the load voltage from the voltage asked for.
    input_mean_a: NotRequired[float]  # [A] Mean current from the source, all losses included.
    input_power_w: NotRequired[float]  # [W] Power from the source.
    output_power_w: NotRequired[float]  # [W] Power in the load.
    loss_total_w: NotRequired[float]  # [W] Sum of every loss item.
    efficiency_ratio: NotRequired[float]  # [1] Output over input power.
    high_side_loss_w: NotRequired[float]  # [W] Loss in one phase's high-side switch.
    low_side_loss_w: NotRequired[float]  # [W] Loss in one phase's low-side switch.
    diode_loss_w: NotRequired[float]  # [W] Loss in one phase's rectifier diode.
    inductor_loss_w: NotRequired[float]  # [W] Loss in one phase's inductor.
    core_loss_w: NotRequired[float]  # [W] Core loss of one phase's inductor.
    core_power_density_w_per_m3: NotRequired[float]  # [W/m3] Core loss per volume.
    flux_swing_pp_t: NotRequired[float]  # [T] Peak-to-peak flux density in the core.
    output_capacitor_loss_w: NotRequired[List[float]]  # Loss of each output bank.
    input_capacitor_loss_w: NotRequired[List[float]]  # Loss of each input bank.
    controller_loss_w: NotRequired[float]  # [W] Loss in the controller: quiescent, gate drive, auxiliary.
    board_loss_w: NotRequired[float]  # [W] Loss in copper paths.
    high_side_junction_degc: NotRequired[float]  # [Cel] High-side junction temperature.
    low_side_junction_degc: NotRequired[float]  # [Cel] Low-side junction temperature.
    diode_junction_degc: NotRequired[float]  # [Cel] Diode junction temperature.
    inductor_winding_degc: NotRequired[float]  # [Cel] Winding and core temperature.
    controller_junction_degc: NotRequired[float]  # [Cel] Controller junction temperature.
    output_capacitor_degc: NotRequired[List[float]]  # Core temperature of each output bank's pieces.
    input_capacitor_degc: NotRequired[List[float]]  # Core temperature of each input bank's pieces.
    output_capacitor_life_s: NotRequired[List[float]]  # Expected life of each output bank, where every one has a known life; part_temperatures tells each that is known.
    input_capacitor_life_s: NotRequired[List[float]]  # Expected life of each input bank, where every one has a known life; part_temperatures tells each that is known.
    thermal_feedback_ratio: NotRequired[float]  # [1] Spectral radius of thermal resistance times power sensitivity; 1 is runaway.
    crossover_hz: NotRequired[float]  # [Hz] Highest frequency at which the loop gain falls through 1.
    phase_margin_deg: NotRequired[float]  # [deg] Least phase margin over all crossovers.
    gain_margin_db: NotRequired[float]  # [dB] Least gain margin over all phase crossings; 60 stands for 60 dB or more, no phase crossing included; not positive for an unstable loop.
    modulus_margin_ratio: NotRequired[float]  # [1] Least distance of the loop gain to −1; negative for an unstable loop.
    load_step_deviation_v: NotRequired[float]  # [V] Greatest deviation after the load step.
    load_step_recovery_s: NotRequired[float]  # [s] Time until the output stays in its band after the load step.
    load_step_inductor_peak_a: NotRequired[float]  # [A] Greatest inductor current after the load step.


class NearestOperable(TypedDict):
    """The nearest condition under which the stage would work; only what was found is given."""

    input_v: NotRequired[float]  # [V] Input voltage at which the stage works, all else equal.
    load_current_a: NotRequired[float]  # [A] Load current at which it works.
    output_v: NotRequired[float]  # [V] Mean output voltage that it reaches.
    duty_ratio: NotRequired[float]  # [1] Duty ratio it would need.
    ambient_degc: NotRequired[float]  # [Cel] Ambient at which it works.
    detail: str


class Runaway(TypedDict):
    """Where thermal runaway begins."""

    part: 'PartRole'
    ambient_degc: NotRequired[float]  # [Cel] Ambient at which it begins, all else equal.
    load_current_a: NotRequired[float]  # [A] Load at which it begins, all else equal.
    input_v: NotRequired[float]  # [V]
    thermal_feedback_ratio: NotRequired[float]  # [1] Spectral radius of thermal resistance times power sensitivity where it begins.
    detail: str


class PartTemperature(TypedDict):
    part: 'PartRole'
    temperature_degc: float  # [Cel]
    rating_degc: NotRequired[float]  # [Cel] Absent if unknown.
    margin_k: NotRequired[float]  # [K] Rating minus temperature.
    life_s: NotRequired[float]  # [s] Expected life of a capacitor at its temperature. Absent if unknown.


class LossItem(TypedDict):
    """One mechanism in one part; nothing is counted twice."""

    part: 'PartRole'
    mechanism: Literal['conduction', 'overlap', 'output_charge', 'recovery', 'dead_time', 'gate_drive', 'leakage', 'junction_charge', 'winding_dc', 'winding_ac', 'core', 'series_resistance', 'quiescent', 'auxiliary', 'input_path', 'output_path', 'switch_node_path', 'source']
    power_w: float  # [W] In the part of one phase.
    count: int  # Phases that have it.
    low_w: float  # [W] Lower end of the model band.
    high_w: float  # [W] Upper end.


class Waveforms(TypedDict):
    """Columnar; six significant digits, more where a curve swings by little, so that its swing has four. Where a curve jumps, the same instant stands twice: the value before and after."""

    time_s: List[float]  # Instants within the period, corners included.
    inductor_a: List[List[float]]  # Current of each phase.
    switch_node_v: List[List[float]]  # Voltage of each phase.
    output_v: List[float]  # At the capacitor node.
    input_a: List[float]  # Summed high-side current.
    input_v: NotRequired[List[float]]  # At the input capacitors.
    output_capacitor_a: List[List[float]]  # Current of each output bank.
    input_capacitor_a: List[List[float]]  # Current of each input bank.


class SteadyStateAnswer(TypedDict):
    """Exact periodic steady state. stage and point can be posted on."""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged']  # How the evaluation ended.
    stage: 'Stage'
    point: 'Point'
    conduction_mode: NotRequired[Literal['continuous', 'boundary', 'discontinuous']]  # Conduction mode; boundary where the rectifier blocks reverse current and the valley is within 0.1 % of the current swing, or the rest within 0.1 % of the period, of the border.
    quantities: NotRequired['Quantities']
    part_temperatures: NotRequired[List['PartTemperature']]
    nearest_operable: NotRequired['NearestOperable']
    runaway: NotRequired['Runaway']
    detail: NotRequired[str]  # In words, where the status is not ok.
    waveforms: NotRequired['Waveforms']
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.


class LossesItem(TypedDict):
    """One operating point."""

    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged']  # How the evaluation ended.
    point: 'Point'
    conduction_mode: NotRequired[Literal['continuous', 'boundary', 'discontinuous']]  # Conduction mode; boundary where the rectifier blocks reverse current and the valley is within 0.1 % of the current swing, or the rest within 0.1 % of the period, of the border.
    quantities: NotRequired['Quantities']
    part_temperatures: List['PartTemperature']
    nearest_operable: NotRequired['NearestOperable']
    runaway: NotRequired['Runaway']
    detail: NotRequired[str]  # In words, where the status is not ok.
    losses: List['LossItem']


class LossesGrid(TypedDict):
    """Answer to a grid."""

    input_v: List[float]  # Axis, slowest.
    load_current_a: List[float]  # Axis.
    ambient_degc: List[float]  # Axis, fastest.
    rows: Dict[str, Any]  # Columnar: one row per cell that has figures.
    failures: List[Dict[str, Any]]  # Cells without figures.


class QuantityColumns(TypedDict):
    """One array per quantity asked for, an entry per row; for per-bank quantities one such array per bank."""

    output_mean_v: NotRequired[List[float]]
    output_ripple_pp_v: NotRequired[List[float]]
    output_ripple_with_esl_pp_v: NotRequired[List[float]]
    input_ripple_pp_v: NotRequired[List[float]]
    inductor_mean_a: NotRequired[List[float]]
    inductor_ripple_pp_a: NotRequired[List[float]]
    inductor_peak_a: NotRequired[List[float]]
    inductor_valley_a: NotRequired[List[float]]
    inductor_rms_a: NotRequired[List[float]]
    high_side_mean_a: NotRequired[List[float]]
    high_side_rms_a: NotRequired[List[float]]
    rectifier_mean_a: NotRequired[List[float]]
    rectifier_rms_a: NotRequired[List[float]]
    output_capacitor_rms_a: NotRequired[List[List[float]]]
    input_capacitor_rms_a: NotRequired[List[float]]
    input_capacitor_bank_rms_a: NotRequired[List[List[float]]]
    circuit_input_mean_a: NotRequired[List[float]]
    duty_ratio: NotRequired[List[float]]
    dead_time_duty_ratio: NotRequired[List[float]]
    energy_balance_ratio: NotRequired[List[float]]
    inductance_effective_h: NotRequired[List[float]]
    output_capacitance_effective_f: NotRequired[List[List[float]]]
    input_capacitance_effective_f: NotRequired[List[List[float]]]
    bridge_v: NotRequired[List[float]]
    on_time_s: NotRequired[List[float]]
    off_time_s: NotRequired[List[float]]
    boundary_load_a: NotRequired[List[float]]
    load_v: NotRequired[List[float]]
    output_error_ratio: NotRequired[List[float]]
    input_mean_a: NotRequired[List[float]]
    input_power_w: NotRequired[List[float]]
    output_power_w: NotRequired[List[float]]
    loss_total_w: NotRequired[List[float]]
    efficiency_ratio: NotRequired[List[float]]
    high_side_loss_w: NotRequired[List[float]]
    low_side_loss_w: NotRequired[List[float]]
    diode_loss_w: NotRequired[List[float]]
    inductor_loss_w: NotRequired[List[float]]
    core_loss_w: NotRequired[List[float]]
    core_power_density_w_per_m3: NotRequired[List[float]]
    flux_swing_pp_t: NotRequired[List[float]]
    output_capacitor_loss_w: NotRequired[List[List[float]]]
    input_capacitor_loss_w: NotRequired[List[List[float]]]
    controller_loss_w: NotRequired[List[float]]
    board_loss_w: NotRequired[List[float]]
    high_side_junction_degc: NotRequired[List[float]]
    low_side_junction_degc: NotRequired[List[float]]
    diode_junction_degc: NotRequired[List[float]]
    inductor_winding_degc: NotRequired[List[float]]
    controller_junction_degc: NotRequired[List[float]]
    output_capacitor_degc: NotRequired[List[List[float]]]
    input_capacitor_degc: NotRequired[List[List[float]]]
    output_capacitor_life_s: NotRequired[List[List[float]]]
    input_capacitor_life_s: NotRequired[List[List[float]]]
    thermal_feedback_ratio: NotRequired[List[float]]
    crossover_hz: NotRequired[List[float]]
    phase_margin_deg: NotRequired[List[float]]
    gain_margin_db: NotRequired[List[float]]
    modulus_margin_ratio: NotRequired[List[float]]
    load_step_deviation_v: NotRequired[List[float]]
    load_step_recovery_s: NotRequired[List[float]]
    load_step_inductor_peak_a: NotRequired[List[float]]


class LossesAnswer(TypedDict):
    """items for a point or a list, grid for a grid. status is that of the worst item or cell."""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged']  # How the evaluation ended.
    stage: 'Stage'
    items: NotRequired[List['LossesItem']]  # In the order of the points.
    grid: NotRequired['LossesGrid']
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.
    explanation: NotRequired[List['Equation']]  # With ?explain=true.


class Corner(TypedDict):
    """Condition that decides; only what matters is given."""

    input_v: NotRequired[float]  # [V]
    output_v: NotRequired[float]  # [V]
    load_current_a: NotRequired[float]  # [A]
    load_resistance_ohm: NotRequired[float]  # [Ohm]
    ambient_degc: NotRequired[float]  # [Cel]
    age_ratio: NotRequired[float]  # [1]
    switching_frequency_hz: NotRequired[float]  # [Hz]
    duty_ratio: NotRequired[float]  # [1]
    hot: NotRequired[bool]  # Resistances at their greatest.


class FormulaInput(TypedDict):
    symbol: str
    value: float
    unit: str  # UCUM code of the values beside it.


class Bound(TypedDict):
    side: Literal['least', 'greatest']
    constraint: str  # Name of the constraint.
    value: float  # What the circuit must see at the worst corner, every tolerance at its worse end.
    part_value: NotRequired[float]  # Rated value that a part of the kind used needs for that.
    left_ratio: NotRequired[float]  # [1] Of the rated value that tolerance, current or bias, temperature and age leave.
    ideal_value: NotRequired[float]  # Textbook value: no losses, no tolerance.
    unit: str  # UCUM code of the values beside it.
    corner: 'Corner'
    pointer: NotRequired[str]  # Field of the requirement behind it.
    formula: NotRequired[str]
    inputs: NotRequired[List['FormulaInput']]
    source: NotRequired[str]
    binding: bool  # It sets the end of its window.


class Window(TypedDict):
    """Values that satisfy every constraint."""

    name: Literal['inductance_h', 'output_capacitance_f', 'output_esr_ohm', 'input_capacitance_f', 'input_esr_ohm', 'switching_frequency_hz']
    unit: str  # UCUM code of the values beside it.
    least: NotRequired[float]  # Absent: no lower bound.
    greatest: NotRequired[float]  # Absent: no upper bound.
    set_by_least: NotRequired[str]  # Constraint that sets it.
    set_by_greatest: NotRequired[str]
    chosen: NotRequired[float]  # Value of the draft stage, effective where bias or tolerance count.
    preferred: NotRequired[float]  # Preferred value of one piece (IEC 60063).
    count: NotRequired[int]  # Pieces.
    series: NotRequired[str]
    bounds: List['Bound']  # Every constraint looked at.


class RequiredRating(TypedDict):
    part: 'PartRole'
    stress: Literal['voltage_v', 'peak_a', 'rms_a', 'mean_a']
    rating: NotRequired[str]  # Name under rating, such as drain_source_v; absent where data sheets give none.
    applied: float  # Worst stress, without margin.
    required: float  # Least rating, margin included.
    unit: str  # UCUM code of the values beside it.
    corner: 'Corner'
    formula: NotRequired[str]
    inputs: NotRequired[List['FormulaInput']]
    source: NotRequired[str]


class Conflict(TypedDict):
    """Why no stage can meet the requirement."""

    fields: List[str]  # Fields of the requirement in conflict.
    constraint: str
    needed: float
    available: float
    unit: str  # UCUM code of the values beside it.
    detail: str


class Divider(TypedDict):
    reference_v: float  # [V]
    upper_ohm: float  # [Ohm]
    lower_ohm: float  # [Ohm]
    output_v: float  # [V] Set by these values.
    error_ratio: float  # [1] Of that against the required voltage.
    worst_error_ratio: NotRequired[float]  # [1] Tolerances of reference and resistors added.
    series: str


class SizingCheck(TypedDict):
    """One limit of the draft stage, checked on the exact engine."""

    quantity: str  # Key of a quantity; one bank of a per-bank quantity is named as in output_capacitor_rms_a/0.
    unit: str  # UCUM code of the values beside it.
    min: NotRequired[float]
    max: NotRequired[float]
    worst: NotRequired[float]  # Worst value found over the condition corners with every spread at its worst end.
    corner: NotRequired['Point']
    full_load: NotRequired[bool]  # It holds at the greatest load only.
    pointer: NotRequired[str]  # Target of the requirement behind it.
    met: bool


class SweepRow(TypedDict):
    """One frequency of the sweep."""

    switching_frequency_hz: float  # [Hz]
    status: Literal['ok', 'infeasible']
    inductance_h: NotRequired[float]  # [H]
    output_capacitance_f: NotRequired[float]  # [F]
    input_capacitance_f: NotRequired[float]  # [F]
    inductor_ripple_pp_a: NotRequired[float]  # [A]
    output_ripple_pp_v: NotRequired[float]  # [V]
    on_time_s: NotRequired[float]  # [s] Shortest.
    on_time_margin_ratio: NotRequired[float]  # [1] Shortest on-time over the least of the controller.
    loss_total_w: NotRequired[float]  # [W] Estimate at typical input and greatest load.
    efficiency_ratio: NotRequired[float]  # [1]
    chosen: bool


class SizingAnswer(TypedDict):
    """stage, point, conditions and limits can be posted on unchanged; they are absent where the requirement is infeasible."""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'infeasible']  # infeasible: conflicts name the fields.
    requirement: 'Requirement'
    conflicts: List['Conflict']
    switching_frequency_hz: NotRequired[float]  # [Hz] That the answer is for.
    windows: List['Window']
    ratings: List['RequiredRating']
    divider: NotRequired['Divider']
    checks: NotRequired[List['SizingCheck']]
    checks_status: NotRequired[Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged']]  # Worst status that the checks met.
    sweep: NotRequired[List['SweepRow']]  # For a frequency range.
    stage: NotRequired['Stage']
    point: NotRequired['Point']
    conditions: NotRequired['Conditions']
    limits: NotRequired[List['Limit']]
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.
    explanation: NotRequired[List['Equation']]  # With ?explain=true.


class Fault(TypedDict):
    pointer: str  # JSON Pointer (RFC 6901) from the root of the request.
    keyword: str  # Kind of fault, such as maximum, required, duplicate-key.
    detail: str
    limit: NotRequired[str]  # What is accepted.
    received: NotRequired[str]  # What was given, cut to a sensible length.
    unit: NotRequired[str]  # UCUM code of the values beside it.


class Problem(TypedDict):
    """Problem details (RFC 9457)."""

    type: str  # URI of the page that explains it.
    title: str
    status: int
    detail: NotRequired[str]
    instance: NotRequired[str]  # Identifier of the request.
    errors: NotRequired[List['Fault']]


class QuantityInfo(TypedDict):
    key: str
    unit: str  # UCUM code of the values beside it.
    symbol: str
    meaning: str
    source: str
    family: Literal['single', 'per-output-bank', 'per-input-bank']
    group: Literal['steady-state', 'losses', 'loop', 'transient']


class QuantitiesAnswer(TypedDict):
    engine: 'Engine'
    quantities: List['QuantityInfo']


class PreferredSeries(TypedDict):
    series: str
    tolerance_ratio: NotRequired[float]  # [1] Tolerance that the series is usually paired with.
    values: List[float]  # Within one decade.


class PreferredValuesAnswer(TypedDict):
    engine: 'Engine'
    source: str
    series: List['PreferredSeries']


class Health(TypedDict):
    status: Literal['ok']


class Readiness(TypedDict):
    status: Literal['ok', 'starting', 'draining', 'unavailable']
    reasons: List[str]


class Job(TypedDict):
    """Long work. A repeated request gives the job that exists."""

    id: str
    operation: Literal['sizing', 'corners', 'substitutions', 'bomChecks', 'reports']
    state: Literal['waiting', 'running', 'done', 'failed', 'cancelled']
    progress: 'Progress'
    result_id: NotRequired[str]  # Where state is done: GET /v1/results/{id}.
    problem: NotRequired['Problem']
    created_at: str  # RFC 3339.
    finished_at: NotRequired[str]  # RFC 3339.


class Progress(TypedDict):
    fraction_ratio: float  # [1]
    samples: NotRequired[int]  # Evaluated so far.
    rate_hz: NotRequired[float]  # [Hz] Evaluations per second.
    remaining_s: NotRequired[float]  # [s] Estimate.


class JobsAnswer(TypedDict):
    jobs: List['Job']
    next: NotRequired[str]  # Cursor of the next page; absent on the last.


class Variable(TypedDict):
    """What is varied."""

    pointer: str  # JSON Pointer (RFC 6901) from the root of the request; model bands stand under /model_bands, drifts under /biases.
    min: float
    typ: float
    max: float
    unit: str  # UCUM code of the values beside it.
    distribution: Literal['uniform', 'normal', 'triangular', 'condition', 'drift', 'model-band']  # condition, drift and model-band are ranges beside the spreads; the last two are factors.
    group: NotRequired[str]
    match_tol: NotRequired[float]  # [1] Independent residual of a group's member.


class VariableValue(TypedDict):
    pointer: str  # JSON Pointer (RFC 6901) from the root of the request.
    value: float
    unit: str  # UCUM code of the values beside it.


class WorstPoint(TypedDict):
    """A worst point found. Posting its stage with its point to /v1/losses gives the same figures."""

    value: NotRequired[float]
    unit: NotRequired[str]  # UCUM code of the values beside it.
    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged']  # How the evaluation ended.
    found_by: Literal['nominal', 'condition-corner', 'vertex', 'search', 'sample']
    best_vertex: NotRequired[float]  # The worst value at the vertices that were tried.
    beyond_vertices: bool  # It lies inside the box and is worse than every vertex tried.
    proven: bool  # Monotonic over the box, shown; otherwise it is the worst point found.
    sample: NotRequired[int]  # Number of the sample, where one found it.
    conduction_mode: NotRequired[Literal['continuous', 'boundary', 'discontinuous']]  # Conduction mode; boundary where the rectifier blocks reverse current and the valley is within 0.1 % of the current swing, or the rest within 0.1 % of the period, of the border.
    point: 'Point'
    variables: List['VariableValue']  # The value of every spread; of a drift or a model band, its factor.
    contributions: NotRequired[List['Contribution']]  # What each variable contributes to the distance from nominal, the greatest first.
    stage: NotRequired['Stage']


class QuantileValue(TypedDict):
    probability_ratio: float  # [1]
    value: float
    error: float  # Bound of the error of the sketch.
    low: NotRequired[float]  # Lower end of the confidence interval.
    high: NotRequired[float]  # Upper end.


class Histogram(TypedDict):
    edges: List[float]  # One more than counts.
    counts: List[int]
    below: int
    above: int


class Statistics(TypedDict):
    """Monte Carlo at one condition corner."""

    corner: int  # Index in condition_corners.
    samples: int  # With a value.
    unit: str  # UCUM code of the values beside it.
    mean: NotRequired[float]
    standard_deviation: NotRequired[float]
    mean_error: NotRequired[float]  # Half width of the confidence interval of the mean.
    least: NotRequired[float]
    greatest: NotRequired[float]
    quantiles: List['QuantileValue']
    histogram: NotRequired['Histogram']
    cp: NotRequired[float]  # [1]
    cpk: NotRequired[float]  # [1]
    percentile_cpk: NotRequired[float]  # [1] By quantiles, for any shape.
    far: NotRequired[int]  # Values beyond the grid of the sketch, counted at its edge in mean and deviation.
    fails: NotRequired[int]  # Units beyond the limit, or without a value.
    wilks_bound: NotRequired[float]  # One-sided bound on the limited side with the stated coverage and confidence.
    wilks_order: NotRequired[int]


class RootSumSquare(TypedDict):
    """Linear estimate at the conditions of the worst point on one side."""

    side: Literal['least', 'greatest']  # Whose worst conditions these are.
    corner: 'CornerPoint'
    unit: str  # UCUM code of the values beside it.
    typical: float
    random_above: float  # Root of the sum of squares of what the tolerances add.
    random_below: float  # Of what they take away.
    bias_above: float  # Sum of the drifts that raise it.
    bias_below: float  # Of those that lower it.
    least: float
    greatest: float
    standard_deviation: NotRequired[float]  # Of the straight response under the distributions.
    curvature_ratio: float  # [1] Measured departure from the straight line over the random term.
    trusted: bool  # The response is straight enough.


Contribution = TypedDict('Contribution', {
    'pointer': str,  # JSON Pointer (RFC 6901) from the root of the request.
    'with': NotRequired[List[str]],  # The other members of its group, which move with it.
    'residual': NotRequired[bool],  # The matching residual of a group's member, apart from the group.
    'change': NotRequired[float],  # Worst value less the value with this variable alone back at typical. Absent where there is none.
    'width_ratio': NotRequired[float],  # [1] Share of the sum of the sizes of all changes; negative where returning to typical would be worse.
})


TornadoBar = TypedDict('TornadoBar', {
    'pointer': str,  # JSON Pointer (RFC 6901) from the root of the request.
    'with': NotRequired[List[str]],  # The other members of its group, which move with it.
    'residual': NotRequired[bool],  # The matching residual of a group's member, apart from the group.
    'at_min': NotRequired[float],  # With the variable at its least. Absent where the stage does not work there.
    'at_max': NotRequired[float],  # At its greatest.
})


class Variance(TypedDict):
    """Shares of the variance at one condition corner, by Sobol indices."""

    corner: int  # Index in condition_corners.
    rows: int  # Rows of the base sample in which every evaluation had a value.
    defined: bool  # false: the quantity does not vary here, or has no values.
    confidence_ratio: float  # [1] Of the bootstrap intervals.
    shares: List['VarianceShare']  # The greatest total first.


VarianceShare = TypedDict('VarianceShare', {
    'pointer': str,  # JSON Pointer (RFC 6901) from the root of the request.
    'with': NotRequired[List[str]],  # The other members of its group, which move with it.
    'residual': NotRequired[bool],  # The matching residual of a group's member, apart from the group.
    'first_order_ratio': float,  # [1] First-order Sobol index.
    'first_order_low_ratio': float,  # [1]
    'first_order_high_ratio': float,  # [1]
    'total_ratio': float,  # [1] Total Sobol index.
    'total_low_ratio': float,  # [1]
    'total_high_ratio': float,  # [1]
})


class QuantityCorners(TypedDict):
    quantity: str  # Key of a quantity; one bank of a per-bank quantity is named as in output_capacitor_rms_a/0.
    unit: str  # UCUM code of the values beside it.
    limit: NotRequired['Limit']
    verdict: Literal['pass', 'fail', 'incomplete', 'no-limit']
    margin_ratio: NotRequired[float]  # [1] Distance of the worst value to the limit over the size of the limit; negative fails.
    model_band: NotRequired[float]  # How far the uncertainty of the loss models could move the worst value for the worse, every band at its worse end.
    within_band: NotRequired[bool]  # The margin is smaller than model_band: the verdict rests on the models.
    failing_units: NotRequired[int]  # Drawn units beyond the limit at any condition corner.
    nominal: NotRequired[float]  # At typical values and conditions, the load at its greatest for a limit at full load. Absent where the stage gives none.
    least: NotRequired['WorstPoint']
    greatest: NotRequired['WorstPoint']
    root_sum_square: NotRequired[List['RootSumSquare']]
    statistics: NotRequired[List['Statistics']]  # One per condition corner.
    variance: NotRequired[List['Variance']]  # One per condition corner at which it was asked for.
    one_at_a_time: NotRequired[List['TornadoBar']]  # The widest first.


class Yield(TypedDict):
    """Joint over all limits and condition corners: a unit passes if it passes at all of them; a failed evaluation is no pass."""

    samples: int
    passes: int
    yield_ratio: float  # [1]
    low_ratio: float  # [1]
    high_ratio: float  # [1]
    confidence_ratio: float  # [1]
    interval: Literal['clopper-pearson', 'replicates']  # How the interval was found.
    wilks_samples: NotRequired[int]  # Samples that the stated coverage and confidence need.


class FailureCount(TypedDict):
    """Evaluations that did not end well, by kind."""

    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged']  # How the evaluation ended.
    method: Literal['extreme-value', 'monte-carlo']
    count: int
    first_sample: NotRequired[int]
    corner: NotRequired[int]  # Index in condition_corners.
    point: NotRequired['Point']
    variables: NotRequired[List['VariableValue']]  # At the failing point nearest to typical.
    stage: NotRequired['Stage']


class WorstSample(TypedDict):
    quantity: str  # Key of a quantity; one bank of a per-bank quantity is named as in output_capacitor_rms_a/0.
    side: Literal['least', 'greatest']
    sample: int
    corner: int
    worst: 'WorstPoint'


CornersAnswer = TypedDict('CornersAnswer', {
    'engine': 'Engine',
    'result_id': str,  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    'status': Literal['ok', 'incomplete'],
    'verdict': Literal['pass', 'fail', 'incomplete', 'no-limit'],  # incomplete: something was not evaluated.
    'seed': int,
    'sampling': NotRequired[Literal['independent', 'sobol', 'latin-hypercube']],
    'samples_asked': NotRequired[int],
    'samples_run': NotRequired[int],
    'evaluations': int,
    'search': NotRequired['SearchEffort'],
    'nominal_point': 'Point',
    'nominal_status': Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged'],  # How the evaluation at typical values and conditions ended.
    'variables': List['Variable'],
    'condition_corners': List['CornerPoint'],
    'quantities': List['QuantityCorners'],  # Limited ones first, in the order of the request.
    'yield': NotRequired['Yield'],
    'failures': List['FailureCount'],
    'worst_samples': NotRequired[List['WorstSample']],
    'stage': 'Stage',
    'conditions': 'Conditions',
    'limits': NotRequired[List['Limit']],
    'assumptions': List['Assumption'],
    'cautions': List['Caution'],
    'warnings': List['Warning'],
    'notice': str,  # What these results are and are not.
})


class SearchEffort(TypedDict):
    """What the search for worst points did."""

    evaluations: int
    dimensions: int  # Independent directions of the box: spreads, groups, residuals, drifts, conditions.
    covered_ratio: float  # [1] Share of the box, by volume, that holds nothing worse than the points found, with the confidence: what independent points spread over it show.
    confidence_ratio: float  # [1]


class Crossover(TypedDict):
    frequency_hz: float  # [Hz]
    phase_margin_deg: float  # [deg]
    falling: bool  # The gain falls through 1.


class PhaseCrossing(TypedDict):
    frequency_hz: float  # [Hz]
    gain_margin_db: float  # [dB]


class LoopCurves(TypedDict):
    """Columnar, an entry per frequency."""

    frequency_hz: List[float]
    loop_gain_db: List[float]  # Sampled-data model.
    loop_phase_deg: List[float]  # Unwrapped from low frequency.
    averaged_loop_gain_db: NotRequired[List[float]]  # Averaged model.
    averaged_loop_phase_deg: NotRequired[List[float]]
    control_to_output_db: NotRequired[List[float]]
    control_to_output_deg: NotRequired[List[float]]
    line_to_output_db: NotRequired[List[float]]
    line_to_output_deg: NotRequired[List[float]]
    compensator_db: NotRequired[List[float]]
    compensator_deg: NotRequired[List[float]]
    output_impedance_ohm: NotRequired[List[float]]  # Open loop, magnitude.
    output_impedance_deg: NotRequired[List[float]]
    closed_loop_output_impedance_ohm: NotRequired[List[float]]
    closed_loop_output_impedance_deg: NotRequired[List[float]]
    audio_susceptibility_db: NotRequired[List[float]]  # Closed loop, input to output.
    audio_susceptibility_deg: NotRequired[List[float]]
    filter_output_impedance_ohm: NotRequired[List[float]]
    input_impedance_ohm: NotRequired[List[float]]  # Closed loop, magnitude.


class LoopRemark(TypedDict):
    """One observation about a loop."""

    topic: Literal['unstable', 'current-alternates', 'lower-gain-unstable', 'no-crossover', 'little-phase', 'zeros-too-high', 'crossover-too-high', 'crossover-too-low', 'amplifier-too-slow', 'little-direct-gain']
    pointer: str  # JSON Pointer (RFC 6901) of what to look at, from the root of the request.
    value: float  # Observed.
    limit: NotRequired[float]  # What it is held against.
    unit: str
    detail: str


class ModelDeviation(TypedDict):
    frequency_hz: float  # [Hz]
    gain_ratio: float  # [1] Loop gain: averaged over sampled-data magnitude, less 1.
    phase_deg: float  # [deg] Loop gain: averaged less sampled-data phase.
    stage_ratio: float  # [1] Stage without compensator: distance of the averaged response from the exact one, relative.


class CurrentLoop(TypedDict):
    """Peak current mode: the loop of the current from one period to the next; of unequal phases that of the least damped one."""

    stable: bool
    eigenvalue_ratio: float  # [1] Exact: what is left of a disturbance of the current after one period, with its sign; magnitude below 1 is stable.
    ideal_eigenvalue_ratio: NotRequired[float]  # [1] From the slopes alone.
    quality_ratio: NotRequired[float]  # [1] Of the sampling poles; not positive is subharmonic oscillation.
    rise_slope_v_per_s: NotRequired[float]  # [V/s] Sensed.
    fall_slope_v_per_s: NotRequired[float]  # [V/s] Sensed.
    slope_v_per_s: NotRequired[float]  # [V/s] Slope compensation given.
    slope_needed_v_per_s: float  # [V/s] Least for stability.


class SourceInteraction(TypedDict):
    """How source or input filter and loop act on each other."""

    stability: Literal['stable', 'unstable']  # Exact test on the loop with the source; unstable too where it cannot be shown stable, as detail then says.
    null_separation_db: NotRequired[float]  # [dB] Least distance of the source impedance below the null impedance.
    null_at_hz: NotRequired[float]  # [Hz]
    driving_separation_db: NotRequired[float]  # [dB] Below the driving-point impedance.
    driving_at_hz: NotRequired[float]  # [Hz]
    input_separation_db: NotRequired[float]  # [dB] Below the closed-loop input impedance.
    input_at_hz: NotRequired[float]  # [Hz]
    phase_margin_deg: NotRequired[float]  # [deg] With the source.
    modulus_margin_ratio: NotRequired[float]  # [1] With the source.
    detail: NotRequired[str]


class LoopItem(TypedDict):
    """The loop at one operating point. A margin that does not exist is absent, and stability, crossing and detail say why."""

    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged', 'unstable', 'no-comparison']  # How the stage and its loop do; no-comparison: the control voltage's ripple outruns the comparator's ramp, so there is no loop to analyse.
    point: 'Point'
    conduction_mode: NotRequired[Literal['continuous', 'boundary', 'discontinuous']]  # Conduction mode; boundary where the rectifier blocks reverse current and the valley is within 0.1 % of the current swing, or the rest within 0.1 % of the period, of the border.
    nearest_operable: NotRequired['NearestOperable']
    stability: NotRequired[Literal['stable', 'unstable']]  # By the eigenvalues of the closed loop, not by margins.
    crossing: NotRequired[Literal['crosses', 'always-below', 'always-above', 'only-rises']]  # Whether the loop gain falls through 1.
    spectral_radius_ratio: NotRequired[float]  # [1] Greatest modulus of the eigenvalues, from one decision of a comparator to the next, with unequal phases in the mean over the decisions of a period; below 1 is stable.
    dominant_hz: NotRequired[float]  # [Hz] Frequency at which that one oscillates.
    crossovers: NotRequired[List['Crossover']]  # All of them, up to twelve.
    phase_crossings: NotRequired[List['PhaseCrossing']]
    crossover_hz: NotRequired[float]  # [Hz] Highest at which the gain falls through 1; absent if there is none.
    phase_margin_deg: NotRequired[float]  # [deg] Least over all crossovers; absent if there is none, and of an unstable loop unless negative.
    gain_margin_db: NotRequired[float]  # [dB] Least by which the gain may rise; absent if there is no such phase crossing. Of an unstable loop negative: by how much the gain must fall at least to pass a phase crossing; else absent.
    gain_reduction_db: NotRequired[float]  # [dB] Least by which it may fall; absent likewise.
    modulus_margin_ratio: NotRequired[float]  # [1] Least distance of the loop gain to -1, with a negative sign for an unstable loop.
    modulus_margin_at_hz: NotRequired[float]  # [Hz]
    bandwidth_hz: NotRequired[float]  # [Hz] Above which the closed loop stays 3 dB down.
    conditionally_stable: NotRequired[bool]  # Stable, but a lower gain is not.
    direct_error_ratio: NotRequired[float]  # [1] By which the mean output is too low for want of direct gain.
    output_impedance_peak_ohm: NotRequired[float]  # [Ohm] Closed loop; absent for an unstable one.
    output_impedance_peak_at_hz: NotRequired[float]  # [Hz]
    current_loop: NotRequired['CurrentLoop']
    source: NotRequired['SourceInteraction']
    remarks: NotRequired[List['LoopRemark']]  # What is wrong and which part to look at, most serious first.
    model_deviation: NotRequired[List['ModelDeviation']]  # Averaged against sampled-data model.
    averaged_good_to_hz: NotRequired[float]  # [Hz] Up to which the averaged stage stays within 10 % of the exact one.
    curves: NotRequired['LoopCurves']
    detail: NotRequired[str]


class SynthesisAnswer(TypedDict):
    ideal: 'Compensator'
    preferred: 'Compensator'
    ideal_crossover_hz: NotRequired[float]  # [Hz]
    ideal_phase_margin_deg: NotRequired[float]  # [deg]
    crossover_hz: NotRequired[float]  # [Hz] With the preferred values.
    phase_margin_deg: NotRequired[float]  # [deg] With the preferred values.
    phase_boost_deg: NotRequired[float]  # [deg] That the compensator must add.
    plant_gain_db: NotRequired[float]  # [dB] At the wanted crossover.
    plant_phase_deg: NotRequired[float]  # [deg]


class LoopGainAnswer(TypedDict):
    """Loop of the stage; with synthesis, of the stage with the preferred compensator, which is in stage."""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged', 'unstable', 'no-comparison']  # Of the worst item.
    stage: 'Stage'
    synthesis: NotRequired['SynthesisAnswer']
    items: List['LoopItem']  # In the order of the points.
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.


class TransientWaveforms(TypedDict):
    """Columnar, decimated with the extremes kept."""

    time_s: List[float]  # 0 is the event.
    output_v: List[float]
    inductor_a: List[List[float]]  # Of each phase.
    load_a: List[float]
    input_v: NotRequired[List[float]]  # At the input capacitors.
    duty_ratio: List[float]  # Of the period that the instant lies in.
    control_v: List[float]  # Output of the error amplifier.
    reference_v: NotRequired[List[float]]


class TransientsAnswer(TypedDict):
    """Closed loop, cycle by cycle on the exact switched circuit."""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged', 'unstable', 'no-comparison', 'collapsed']  # How the computation ended; drop-out and the like: the stage does not regulate before the event, or at the point that follows it; unstable: the loop does not hold its operating point before or after the event; no-comparison as for loops; collapsed: the load drags the output below zero.
    stage: 'Stage'
    point: 'Point'
    event: 'TransientEvent'
    detail: NotRequired[str]
    nearest_operable: NotRequired['NearestOperable']
    cycles: int  # Switching periods computed.
    duration_s: NotRequired[float]  # [s] Time followed after the event.
    band_v: NotRequired[float]  # [V] Half width of the band of recovery.
    before_v: NotRequired[float]  # [V] Mean output before the event.
    after_v: NotRequired[float]  # [V] Mean output at the end.
    expected_after_v: NotRequired[float]  # [V] Mean output of the steady state that follows, where there is one, want of direct gain included.
    deviation_down_v: NotRequired[float]  # [V] Greatest drop below the mean before and that after the event, whichever is less, ripple included; for a start, below the output it began with.
    deviation_down_at_s: NotRequired[float]  # [s]
    deviation_up_v: NotRequired[float]  # [V] Greatest rise above the greater of both means, ripple included.
    deviation_up_at_s: NotRequired[float]  # [s]
    overshoot_ratio: NotRequired[float]  # [1] Of a step of the reference or a start: excursion beyond the mean that follows, over the change.
    recovered: NotRequired[bool]  # The output stays in its band until the end.
    recovery_s: NotRequired[float]  # [s] Absent if not recovered.
    inductor_peak_a: NotRequired[float]  # [A]
    inductor_valley_a: NotRequired[float]  # [A]
    saturation_a: NotRequired[float]  # [A] Rating; absent if unknown.
    saturated: NotRequired[bool]  # The peak passes the rating.
    current_limit_cycles: NotRequired[int]
    greatest_duty_cycles: NotRequired[int]  # Cycles at the greatest duty ratio.
    skipped_cycles: NotRequired[int]  # Cycles without a pulse.
    settled: NotRequired[bool]  # The last periods repeat.
    alternates: NotRequired[bool]  # They repeat every second time: subharmonic oscillation.
    output_least_v: NotRequired[float]  # [V] Exact, after the event.
    output_greatest_v: NotRequired[float]  # [V] Exact, after the event.
    conduction_modes: NotRequired[List[Literal['continuous', 'boundary', 'discontinuous']]]  # Seen along the way.
    waveforms: NotRequired['TransientWaveforms']
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.


class Finding(TypedDict):
    """One rule's verdict about one place in the stage."""

    rule: str  # Pack and rule: general-practice/inductor-heating.
    title: str
    severity: Literal['error', 'warning', 'note']
    verdict: Literal['pass', 'fail', 'waived', 'not-evaluated']
    pointer: str  # JSON Pointer (RFC 6901) from the root of the request.
    relation: NotRequired[Literal['at-most', 'at-least']]  # How value must stand to limit.
    value: NotRequired[float]
    limit: NotRequired[float]
    unit: NotRequired[str]  # UCUM code of the values beside it.
    margin_ratio: NotRequired[float]  # [1] What is left to the limit over its size, temperatures counted from 25 degC; negative fails.
    value_low: NotRequired[float]  # Least value within the bands of the loss models.
    value_high: NotRequired[float]  # Greatest.
    within_band: NotRequired[bool]  # The margin is smaller than the band: the verdict could turn.
    corners: NotRequired[List['Corner']]  # Where the values are worst.
    worst_by: NotRequired[Literal['search', 'seeded-search', 'vertices', 'seeded-vertices']]  # How the worst of the values was looked for; absent where none is a worst value. search: at vertices of the box of tolerances and conditions, then inside it. seeded-search: the same from known worst points, with every coordinate moved in turn, not inside the box. vertices: at the vertices that sensitivities point to and no further, as for every quantity of loop and load step. It is the worst found, not proven. seeded-vertices: from the vertices of the proven stage, moved by what a replacement part changes. It may miss about 2 % of a loop's quantity, 6 % of a load step's and 10 % of a recovery time.
    missing: NotRequired[List[str]]  # Data that a verdict would need.
    beyond: NotRequired[List[str]]
    detail: str
    basis: NotRequired[str]
    pack: NotRequired[str]
    edition: NotRequired[str]
    provenance: NotRequired[str]
    origin: NotRequired[str]  # Rule of another pack that this one was derived from.
    waived_from: NotRequired[Literal['pass', 'fail', 'waived', 'not-evaluated']]  # Verdict before the waiver.
    waiver: NotRequired['Waiver']


class PackUsed(TypedDict):
    id: str
    title: NotRequired[str]
    edition: str
    provenance: NotRequired[str]
    extends: NotRequired[str]


OverrideUsed = TypedDict('OverrideUsed', {
    'pack': str,  # The pack that changes.
    'target': str,  # Rule, or name of a parameter.
    'what': Literal['limit', 'severity', 'enabled', 'parameter'],
    'from': str,
    'to': str,
    'reason': str,
})


FindingCounts = TypedDict('FindingCounts', {
    'pass': int,
    'fail': int,
    'waived': int,
    'not_evaluated': int,
})


class RuleChecksAnswer(TypedDict):
    """Findings and the verdict over all."""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'incomplete']
    verdict: Literal['pass', 'fail', 'incomplete']  # A failed error or warning fails. Otherwise an error that was not evaluated, or nothing evaluated at all, leaves it incomplete. A note decides nothing.
    counts: 'FindingCounts'
    findings: List['Finding']
    packs: List['PackUsed']
    overrides: NotRequired[List['OverrideUsed']]
    not_applicable: NotRequired[List[str]]  # Rules that found no place to look at.
    stage: NotRequired['Stage']
    conditions: NotRequired['Conditions']
    limits: NotRequired[List['Limit']]
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.


class RulePackSummary(TypedDict):
    id: str
    title: str
    edition: str
    provenance: str
    rules: int  # Number of rules.


class RulePacksAnswer(TypedDict):
    engine: 'Engine'
    packs: List['RulePackSummary']


class RulePackAnswer(TypedDict):
    engine: 'Engine'
    pack: 'RulePack'


class QuantityChange(TypedDict):
    """A quantity that moves."""

    quantity: str  # Key of a quantity; one bank of a per-bank quantity is named as in output_capacitor_rms_a/0.
    unit: str  # UCUM code of the values beside it.
    nominal_before: NotRequired[float]
    nominal_after: NotRequired[float]
    least_before: NotRequired[float]  # Least over all corners; absent where nobody asked for it.
    least_after: NotRequired[float]
    greatest_before: NotRequired[float]
    greatest_after: NotRequired[float]
    limit: NotRequired['Limit']


class FindingChange(TypedDict):
    change: Literal['appears', 'disappears', 'better', 'worse']
    before: NotRequired['Finding']
    after: NotRequired['Finding']


class SubstitutionReason(TypedDict):
    """One reason for a verdict."""

    code: Literal['rule-fails', 'failure-grows', 'dangerous', 'fails-before-too', 'not-evaluated', 'data-missing', 'waiver-of-another-part', 'check-incomplete']  # The first three reject, the others ask for a review.
    rule: NotRequired[str]
    pointer: NotRequired[str]  # JSON Pointer (RFC 6901) from the root of the request.
    detail: str


class RankTerms(TypedDict):
    """What the score is made of; less is better."""

    loss_ratio: NotRequired[float]  # [1] Nominal loss over that of the proven stage.
    temperature_ratio: NotRequired[float]  # [1] Used share of the permitted temperature rise, at the part with the least left.
    cost_ratio: NotRequired[float]  # [1] Cost over the least cost of all.
    area_ratio: NotRequired[float]  # [1] Area over the least area of all.


class SubstitutionItem(TypedDict):
    """One replacement."""

    id: NotRequired[str]
    role: str
    verdict: Literal['accepted', 'rejected', 'needs-review']
    status: Literal['ok', 'over-temperature', 'drop-out', 'too-short-on-time', 'no-operating-point', 'runaway', 'not-converged']  # Of the worst evaluation with the part.
    rank: NotRequired[int]
    score: NotRequired[float]  # [1] Weighted; less is better.
    terms: NotRequired['RankTerms']
    reasons: List['SubstitutionReason']
    missing: List[str]  # Data that a verdict would need: pointers into the request, or names of quantities.
    quantities: List['QuantityChange']  # Those that move, of the ones that rules, limits or the request name.
    findings: List['FindingChange']
    counts: NotRequired['FindingCounts']
    cautions: NotRequired[List['Caution']]


class SubstitutionsAnswer(TypedDict):
    """What each replacement changes, and the verdict on it."""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'incomplete']
    verdict: Literal['accepted', 'rejected', 'needs-review']  # Of all: rejected if any is, else needs-review if any does, else accepted.
    before_verdict: Literal['pass', 'fail', 'incomplete']  # Of the stage as it is.
    items: List['SubstitutionItem']  # In the order of the replacements.
    packs: List['PackUsed']
    overrides: NotRequired[List['OverrideUsed']]
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.


class BomDifference(TypedDict):
    field: Literal['present', 'count', 'value', 'tolerance', 'rating', 'kind', 'part_number', 'alternate']
    verdict: Literal['fail', 'not-evaluated']
    proven: NotRequired[str]  # What was proven, in words.
    found: NotRequired[str]  # What the line says.
    proven_value: NotRequired[float]
    found_value: NotRequired[float]
    unit: NotRequired[str]  # UCUM code of the values beside it.
    detail: str


class BomLineResult(TypedDict):
    line: NotRequired[int]
    designators: List[str]
    rail: NotRequired[str]
    role: NotRequired[str]
    verdict: Literal['agrees', 'differs', 'unreadable', 'missing', 'alternate-accepted', 'alternate-rejected', 'needs-review']
    differences: NotRequired[List['BomDifference']]
    part_number: NotRequired[str]  # Of the approved alternate that the line names.


class BomRailResult(TypedDict):
    name: str
    verdict: Literal['agrees', 'differs', 'incomplete']
    lines: int  # Bound lines.
    differences: int  # Findings that something differs.
    not_evaluated: NotRequired[int]  # Findings that something could not be compared.
    missing_designators: NotRequired[List[str]]
    unbound_designators: NotRequired[List[str]]  # In the designator ranges, bound to no role.
    roles: NotRequired[List['BomRoleResult']]  # Differences about a role as a whole, such as its number of pieces.
    alternates: NotRequired[List['BomAlternateResult']]  # Approved alternates, each run as a substitution.


class BomRoleResult(TypedDict):
    role: str
    differences: List['BomDifference']


class BomAlternateResult(TypedDict):
    role: str
    part_number: str
    substitution: 'SubstitutionItem'


class BomUnboundLine(TypedDict):
    """A line whose designators lie in the ranges of a rail and are bound to no role."""

    rail: str
    line: NotRequired[int]
    designators: List[str]
    value: NotRequired[str]
    part_number: NotRequired[str]


class BomChecksAnswer(TypedDict):
    """Does the bill of material agree with what was proven?"""

    engine: 'Engine'
    result_id: str  # res_ and the SHA-256 of operation, engine and canonical request (RFC 8785).
    status: Literal['ok', 'incomplete']
    verdict: Literal['agrees', 'differs', 'incomplete']
    rails: List['BomRailResult']
    lines: List['BomLineResult']  # Bound lines, in the order of the document.
    unbound_lines: NotRequired[List['BomUnboundLine']]  # Lines that look as if they belonged to a rail.
    assumptions: List['Assumption']
    cautions: List['Caution']
    warnings: List['Warning']
    notice: str  # What these results are and are not.


PATHS: Dict[str, tuple[str, str]] = {
    'sizing': ('POST', '/v1/sizing'),
    'steadyState': ('POST', '/v1/steady-state'),
    'losses': ('POST', '/v1/losses'),
    'corners': ('POST', '/v1/corners'),
    'loopGain': ('POST', '/v1/loop-gain'),
    'transients': ('POST', '/v1/transients'),
    'ruleChecks': ('POST', '/v1/rule-checks'),
    'substitutions': ('POST', '/v1/substitutions'),
    'bomChecks': ('POST', '/v1/bom-checks'),
    'reports': ('POST', '/v1/reports'),
    'listQuantities': ('GET', '/v1/quantities'),
    'listPreferredValues': ('GET', '/v1/preferred-values'),
    'listRulePacks': ('GET', '/v1/rule-packs'),
    'getRulePack': ('GET', '/v1/rule-packs/{id}'),
    'listJobs': ('GET', '/v1/jobs'),
    'getJob': ('GET', '/v1/jobs/{id}'),
    'cancelJob': ('DELETE', '/v1/jobs/{id}'),
    'getJobEvents': ('GET', '/v1/jobs/{id}/events'),
    'getResult': ('GET', '/v1/results/{id}'),
}


class Operations(ABC):
    """The operations that answer JSON, each typed as the contract has it."""

    @abstractmethod
    def _json(self, operation: str, in_path: Mapping[str, str], query: Mapping[str, Any], request: Optional[Mapping[str, Any]]) -> Any:
        """Sends a request and returns the JSON value of the answer."""

    def sizing(self, request: SizingRequest, *, explain: Optional[bool] = None) -> SizingAnswer:
        """Size a power stage from a requirement."""
        return cast(SizingAnswer, self._json('sizing', {}, {'explain': explain}, cast(Mapping[str, Any], request)))

    def steady_state(self, request: SteadyStateRequest) -> SteadyStateAnswer:
        """Exact periodic steady state."""
        return cast(SteadyStateAnswer, self._json('steadyState', {}, {}, cast(Mapping[str, Any], request)))

    def losses(self, request: LossesRequest, *, explain: Optional[bool] = None) -> LossesAnswer:
        """Losses and temperatures at electro-thermal equilibrium."""
        return cast(LossesAnswer, self._json('losses', {}, {'explain': explain}, cast(Mapping[str, Any], request)))

    def corners(self, request: CornersRequest) -> CornersAnswer:
        """Worst case over tolerance, conditions and age."""
        return cast(CornersAnswer, self._json('corners', {}, {}, cast(Mapping[str, Any], request)))

    def loop_gain(self, request: LoopGainRequest) -> LoopGainAnswer:
        """Loop gain and compensator."""
        return cast(LoopGainAnswer, self._json('loopGain', {}, {}, cast(Mapping[str, Any], request)))

    def transients(self, request: TransientsRequest) -> TransientsAnswer:
        """Closed-loop response, cycle by cycle."""
        return cast(TransientsAnswer, self._json('transients', {}, {}, cast(Mapping[str, Any], request)))

    def rule_checks(self, request: RuleChecksRequest) -> RuleChecksAnswer:
        """Design rules on worst-case quantities."""
        return cast(RuleChecksAnswer, self._json('ruleChecks', {}, {}, cast(Mapping[str, Any], request)))

    def substitutions(self, request: SubstitutionsRequest) -> SubstitutionsAnswer:
        """May this part replace that one?"""
        return cast(SubstitutionsAnswer, self._json('substitutions', {}, {}, cast(Mapping[str, Any], request)))

    def bom_checks(self, request: BomChecksRequest) -> BomChecksAnswer:
        """Does the bill of material agree with what was proven?"""
        return cast(BomChecksAnswer, self._json('bomChecks', {}, {}, cast(Mapping[str, Any], request)))

    def list_quantities(self) -> QuantitiesAnswer:
        """The dictionary of quantities."""
        return cast(QuantitiesAnswer, self._json('listQuantities', {}, {}, None))

    def list_preferred_values(self) -> PreferredValuesAnswer:
        """Preferred values of IEC 60063."""
        return cast(PreferredValuesAnswer, self._json('listPreferredValues', {}, {}, None))

    def list_rule_packs(self) -> RulePacksAnswer:
        """Rule packs that the service has."""
        return cast(RulePacksAnswer, self._json('listRulePacks', {}, {}, None))

    def get_rule_pack(self, id: str) -> RulePackAnswer:
        """One rule pack."""
        return cast(RulePackAnswer, self._json('getRulePack', {'id': id}, {}, None))

    def list_jobs(self, *, cursor: Optional[str] = None, limit: Optional[int] = None) -> JobsAnswer:
        """Jobs, newest first."""
        return cast(JobsAnswer, self._json('listJobs', {}, {'cursor': cursor, 'limit': limit}, None))

    def get_job(self, id: str) -> Job:
        """State and progress of a job."""
        return cast(Job, self._json('getJob', {'id': id}, {}, None))

    def cancel_job(self, id: str) -> Job:
        """Cancel a job."""
        return cast(Job, self._json('cancelJob', {'id': id}, {}, None))
