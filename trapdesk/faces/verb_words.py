"""What the verbs match, line and tuner say of themselves; nothing heavy, for help answers at once."""

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
