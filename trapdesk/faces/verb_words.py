"""What the command line and some verbs say of themselves; nothing heavy, for help answers at once."""

ABOUT = """\
Design, build and tune a two-band trap dipole, in one terminal.

  trapdesk [FILE]               open the desk, on a design or the first preset
  trapdesk figures FILE         everything computed for a design
  trapdesk sheet FILE           the build sheet, plain text for paper
  trapdesk tank NAME=VALUE ...  a parallel resonator from any few of its values
  trapdesk coil NAME=VALUE ...  one coil: what it is, what to wind and cut
  trapdesk match Z=... f=...    a load of your own matched, network by network
  trapdesk line TYPE length=... what a line does to a load
  trapdesk tuner FILE           is a tuner worth it; its settings, its reach
  trapdesk rummage FILE         the best traps a box of parts can build for it
  trapdesk choices FILE         other trap resonances, other L to C
  trapdesk tolerance FILE       will it still cover the bands, built and hung
  trapdesk readings FILE ...    what was measured of a trap; how to measure it
  trapdesk next FILE ...        what to fold, cut or mend next, by the readings
  trapdesk touchstone FILE      the feed impedance as a Touchstone file

FILE is a design in TOML, or the name of a preset. A file that is called like a
verb is opened by its path: trapdesk ./figures. Every verb has --help with an
example."""

ENDING = """\
Exit: 0 an answer, 1 no answer exists, 2 bad input, 3 a file that cannot be
read or written.
All figures are estimates until something is measured."""

ROWS = "the best so many, 20 unless said, and the best of each kind"

MATCH = """\
Print how to match a load, network by network, the least loss first.
  Z f           the load, as 35-j120, 35-120j or "35 -120", and where
  network       one alone, such as t-clc; all unless said
  wanted power  what the source should see, 50 ohm; watts, 100 W
  QL QC         quality of coils and capacitors; 100 and 1000 unless said
  Lmin Lmax Cmin Cmax Lsteps Csteps   what the tuner at hand can be set to
  tuner         a design or preset that has a table [station.tuner]
  Q             of a pi or T: its one choice, instead of limits
  line          a type of line to cut stubs from"""

LINE = """\
Print what a line does to a load, or what load is at its far end.
  TYPE          such as RG-58/U; without one Z0, VF and loss of its own
  length f      how much of it, and at what frequency
  Z or Zin      the load, or what is measured at the transmitter's end
  power         watts into it; 100 W unless said
  Z0 VF loss    its own values; loss=0.073dB/m@30MHz,0.144dB/m@100MHz
  age weather   in years; dry or wet: estimates"""

TUNER = """\
Print whether a tuner is worth it, the watts on the way down, its settings and
the loads it can match. A design without a line may be given one here."""

COIL = """\
Print one coil: what it is at a frequency, what to wind and cut, what can
still be moved afterwards.
  kind          solenoid unless said; given, cable, toroid
  f             at what frequency
  turns         or, to have them solved: the L it shall have, or the C it shall
                resonate with; turns of cable are solved for f alone
  and what it is made from, as in a design's table [antenna.trap.coil]:
  former wire pitch length insulation lead material;
  cable former tail terminals; inductance_index outer inner height wire"""

TOLERANCE = """\
Print how many antennas of a design, as built and hung with all their doubts,
keep the SWR limit: as cut, with tuned traps, brought to aim, wet; what that
comes from, what would help, and how much longer to cut the wires."""

TANK = """\
Print a parallel resonator from any sufficient few of its values:
  f   LC resonance            R   series resistance of the coil
  L   inductance              RD  dynamic resistance, L/(C R)
  C   capacitance             Q   reactance over R
  B   width, f/Q
Capitals or not does not matter. Three values are enough, unless one of them
follows from the others."""

READINGS = """\
Print what was measured of a trap and its parts beside what is computed, with
how sure it is. Without readings: every kind of them and how to do it well."""

NEXT = """\
Print what to do next with the antenna as it hangs, by what was read of it:
fold, let out, cut or add wire, mend the traps, or stop; or what is broken."""
