// Package packs holds the design rules as data: documents in YAML or JSON whose
// conditions, values and limits are expressions in the Common Expression
// Language. A document is checked when it is loaded, for names, types and
// dimensions, and made into functions that calc/rules calls; nothing is left to
// find out when a rule fires.
//
// # A rule
//
// A rule names its scope, the kind of part it looks at, and is applied to every
// such part of a stage: stage, high_side, low_side, diode, inductor, controller,
// output_capacitors/* or input_capacitors/*. Where its condition (when) holds,
// its value must be at_most or at_least its limit, both in its unit, a UCUM code.
// needs lists facts without which there is no verdict, though no expression uses
// them. at is the pointer of the finding below the part. message may contain
// {value}, {limit}, {unit}, {margin}, {part} and {rule}; basis says where the
// limit stands.
//
// # Names in expressions
//
//	nominal.Q              a quantity at typical values and conditions
//	least.Q, greatest.Q    its extremes over all corners
//	full_load_least.Q      its extremes over the corners at the greatest load,
//	full_load_greatest.Q
//	stage.F                a number of the stage, its pointer's slashes as dots
//	stage_least.F          the ends of its spread
//	stage_greatest.F
//	part.F, part_least.F, part_greatest.F    the same of the part in scope
//	part.kind, part.count, part.assumed      of a capacitor bank, of any part
//	part.capacitance_at_bias_to_v            last voltage of a bank's bias table
//	stage.rectifier, stage.phase_count, stage.has_loop, stage.has_feedback
//	requirement.F          a number of the requirement
//	parameter.P            a constant of the pack
//
// A quantity of one capacitor bank is known in the scope of its banks only.
// rules.Vocabulary lists all names of a scope.
//
// # Operators and functions
//
// Arithmetic, comparison, logic and the conditional operator of the language;
// min and max of two or three numbers, abs, sqrt, and linear(x, x0, y0, x1, y1),
// the straight line between two points, flat beyond them. has(name) tells whether
// a fact is known. There are no lists, loops, strings functions or macros besides.
// Whole numbers are real numbers.
//
// Dimensions are followed through every expression: volts are not compared with
// amperes, and a temperature in degrees Celsius can be shifted by kelvins and
// scaled by a bare number, but not multiplied with anything else. A bare number
// takes the dimension of what it is added to or compared with.
//
// # Derived packs
//
// A pack that extends another inherits its rules and parameters. Its overrides
// set a limit, a severity or a parameter, or switch a rule off, each with a
// reason; every report of the pack names them.
package packs
