# Valves shut: the pressure is only watched, a row is written, and the end of
# the program is a HOLD.
at 0.0s  cell A 5 bar
at 0.0s  cell B 5 bar
at 0.5s  arm
at 0.6s  isolate                 -> record intent, hold 5 bar, record command
expect mode isolated
at 0.7s  answer
at 1.5s  cell A 5.00001 bar
at 1.5s  cell B 5 bar
at 1.6s  tick
at 3.0s  cell A 5.00001 bar
at 3.0s  cell B 5 bar
at 5.0s  cell A 5.00001 bar
at 5.0s  cell B 5 bar
at 6.0s  tick
at 7.5s  cell A 5.00002 bar
at 7.5s  cell B 5 bar
at 9.0s  tick
at 10.5s cell A 5.00002 bar
at 10.5s cell B 5 bar
at 10.6s tick                    -> record step, record intent
expect mode HOLD because valves shut at the end of leak test
