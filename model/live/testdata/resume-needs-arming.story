# A program that was paused goes on only on a bench that is armed: who paused it
# may be back after hours.
at 0.0s  obey on
at 0.0s  cell A 1 bar
at 0.0s  run until 0.5s
at 0.5s  arm
at 0.6s  steps 3bar
at 0.6s  run until 3s
at 3.0s  pause
at 3.0s  run until 200s
at 200s  resume                  -> record intent
expect notice refused: the bench is not armed
expect setpoint 1.6 bar
at 200s  arm
at 200s  resume                  -> record intent
at 200s  run until 202s
expect setpoint 2 bar
