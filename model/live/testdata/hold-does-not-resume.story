# HOLD during a run of steps ends the run; arming again does not resume it.
at 0.0s  obey on
at 0.0s  cell A 1 bar
at 0.0s  run until 0.5s
at 0.5s  arm
at 0.6s  steps 1.5bar 2bar 2.5bar
at 0.6s  run until 6s
at 6.0s  hold                    -> hold 1.5 bar, record command, record intent
expect mode HOLD because asked for
at 6.0s  run until 30s
expect mode HOLD
at 30s   arm                     -> record intent
at 30s   run until 60s
expect mode armed
expect setpoint 1.5 bar
