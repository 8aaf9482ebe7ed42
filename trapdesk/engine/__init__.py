"""The engine: pure functions on SI floats and arrays, numpy only, nothing re-exported here.

The files, each one subject:

====================  ==================================================================================
``limits``            the check of arguments: a value outside its limits is named, never clamped
``constants``         constants of nature
``quadrature``        integrals by nodes and weights, values between Chebyshev nodes
``special``           Bessel and complete elliptic integrals, round-wire ratio
``metals``            metals by name: plain values, as in the four files below; they need no numpy
``soils``             what can lie under the wire, soils by name
``dielectrics``       what capacitors are made of, by name
``cable_list``        cables by name, with their listed values
``coil_limits``       how much of a coil the ring solution is asked for
``conductors``        resistivity, skin effect, AC resistance, insulation
``coils``             solenoid: inductance, self-capacitance, loss
``rings``             the ring solution under it: coaxial rings with the current crowded as it is
``coil_table``        a quick solenoid for a search, fitted to the rings
``toroids``           coils on ring cores: inductance, wire, what fits, flux
``coil_formulas``     published formulas for the solenoid: a start for `coils`
``cables``            lines, coaxial or parallel: loss, transformation, what stands on them
``cable_types``       lines from the listed values of a cable
``cable_trap``        the trap wound of coaxial cable, as a circuit
``cable_winding``     the same as a winding: inductance, resistance, turns for a resonance
``capacitors``        loss by Q or dielectric, open stubs, what voltage a capacitor stands
``resonator``         the one parallel resonator: trap, tuner element, trial and fit alike
``resonances``        what it is known by: resonances, dynamic resistance, width, Q
``mesh``              sides of a wire cut into elements: quadratures, static integrals, sample points
``wire``              thin-wire integral equation: a wire with ports to its port matrix and currents
``ports``             that wire over frequency: port matrices, traps as terminations, interpolation
``quotients``         traps and ports as numerators over denominators, which vary slowly
``ground``            the half-space: Sommerfeld kernels, reflection coefficients, field in the air
``sky``               what a wire sends to the sky: the far field summed over all directions
``reflection``        reflection and standing wave ratio of an impedance against the wanted one
``ladder``            series and shunt branches and stretches of line: cascade, loss, what each part carries
``arms``              coils and capacitors as immittances: the algebra under the closed-form matches
``networks``          the registry of matching networks and the closed-form match of each; touchiness
``spans``             limits of real parts: the span of settings of a network
``matching``          the match of least loss within limits, the loads in reach
``nearest``           the best setting for a load: match or nearest, what is short, arms in steps
``heat``              how warm a part gets, and drift of a resonance
``stress``            what each part of the resonator carries: currents, volts, watts, reactive power
``sampling``          random numbers that are the same on every machine
``tank``              parts of a resonator from any sufficient subset of its quantities
``measured``          parts from a few measured numbers, each with its uncertainty
``fits``              resonators fitted to a sweep, each value with its uncertainty
``roots``             bracketed roots, Newton in a few unknowns, a status per element
====================  ==================================================================================

The symbols that formulas use; signatures spell the names out. Time runs as exp(+jwt):

========  ================================================  ==================
symbol    meaning                                           unit
========  ================================================  ==================
``f``     frequency                                         [Hz]
``w``     angular frequency, 2 pi f                         [rad/s]
``L``     inductance                                        [H]
``C``     capacitance                                       [F]
``R``     resistance; ``R_D`` is the dynamic resistance     [ohm]
``Q``     quality factor                                    [1]
``Z``     impedance, R + jX                                 [ohm]
``k0``    wave number of free space, w / c                  [rad/m]
``eta0``  wave impedance of free space, 376.730             [ohm]
========  ================================================  ==================
"""
