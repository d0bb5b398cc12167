# A program can be paused, resumed, skipped and stopped; stopping leaves the
# gas where it is.
at 0.0s  obey on
at 0.0s  cell A 1 bar
at 0.0s  run until 0.5s
at 0.5s  pause                   -> record intent
expect notice refused: no program is under way
at 0.5s  arm
at 0.6s  steps 3bar 2bar 4bar
at 0.6s  run until 3s
expect setpoint 1.6 bar
at 3.0s  pause                   -> record intent
at 3.0s  run until 20s
expect setpoint 1.6 bar
at 20s   resume                  -> record intent
at 20s   run until 22s
expect setpoint 2 bar
at 22s   skip                    -> record intent, record intent
at 22s   run until 35s
expect mode ramping
at 35s   stop                    -> record intent
expect mode steady because stopped
at 35s   run until 60s
expect mode steady
