# A transducer that falls silent while filling ends in HOLD, and the setpoint
# freezes at the last pressure read.
at 0.0s  cell A 2.385 bar
at 0.0s  cell B 2.385 bar
at 0.1s  arm                     -> record intent
at 0.2s  go to 3.1 bar           -> record intent, record command, setpoint 2.585 bar
expect mode ramping
at 0.3s  answer                  -> record readback
at 0.5s  cell A 2.41 bar         ->
at 0.5s  cell B 2.40 bar         ->
at 1.0s  tick                    -> record prediction
at 1.3s  tick                    -> record command, setpoint 2.785 bar
at 1.4s  answer
at 2.6s  tick                    -> hold 2.785 bar, record command, alarm held by itself unacknowledged, bell, call
expect mode HOLD because stale
