# A run of steps goes up and down, settles, dwells and ends at its last target.
at 0.0s  obey on
at 0.0s  cell A 1 bar
at 0.0s  run until 0.5s
at 0.5s  arm
at 0.6s  steps 1.5bar 2bar 1.5bar
at 0.6s  run until 7s
expect setpoint 1.5 bar
at 7.0s  run until 60s
expect mode steady because settled
expect setpoint 1.5 bar
expect notice steps: complete
