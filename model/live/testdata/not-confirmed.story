# A controller that never confirms a setpoint, or refuses it, ends in HOLD.
at 0.0s  cell A 1 bar
at 0.1s  arm
at 0.2s  go to 5 bar
at 1.9s  cell A 1.1 bar
at 3.1s  cell A 1.1 bar
at 3.2s  tick
expect mode ramping
at 3.3s  tick                    -> hold 1.1 bar, record command, alarm held by itself unacknowledged, bell, call
expect mode HOLD because did not confirm
at 4.0s  answer
at 4.1s  arm
at 4.2s  cell A 1.1 bar
at 4.3s  go to 5 bar
at 4.4s  answer -222 data out of range -> record readback, hold 1.1 bar, record command
expect mode HOLD because data out of range
