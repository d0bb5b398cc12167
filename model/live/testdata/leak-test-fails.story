# A pressure that rises faster than allowed while the valves are shut ends the
# leak test in HOLD.
at 0.0s  cell A 0.01 bar
at 0.5s  arm
at 0.6s  isolate
at 0.7s  answer
at 10.5s cell A 0.012 bar
at 10.6s tick                    -> record prediction, record step, hold 12 mbar, record command, alarm held by itself unacknowledged, bell, call
expect mode HOLD because pressure rose by 20 Pa/s
