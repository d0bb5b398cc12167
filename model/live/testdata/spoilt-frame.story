# One answer that failed does not end a ramp: the last good reading stands in for
# a second. A gauge that goes on failing does.
at 0.0s  cell A 2.385 bar
at 0.0s  cell B 2.385 bar
at 0.1s  arm
at 0.2s  go to 3.1 bar           -> record intent, record command, setpoint 2.585 bar
at 0.3s  answer
at 0.5s  cell A 2.41 bar
at 0.5s  cell B 2.40 bar
at 0.6s  cell A 0 bar failure
at 0.65s tick                    -> record prediction
expect mode ramping
at 0.7s  cell A 2.42 bar
at 0.8s  cell A 0 bar failure
at 1.5s  cell B 2.41 bar
at 1.6s  tick                    -> record prediction, record command, setpoint 2.785 bar
at 1.7s  answer
at 1.72s tick                    -> hold 2.41 bar, record command, alarm held by itself unacknowledged, bell, call
expect mode HOLD because cell A: failure
