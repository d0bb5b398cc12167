# With the logbook lost a ramp ends in HOLD, and only HOLD is taken.
at 0.0s  obey on
at 0.0s  cell A 1 bar
at 0.0s  run until 0.5s
at 0.5s  arm
at 0.6s  go to 5 bar
at 0.6s  run until 3s
at 3.0s  record lost             -> hold 1.6 bar, record command
expect mode HOLD because disk full
at 3.1s  arm                     -> record intent
expect notice refused: nothing is being recorded
at 3.2s  hold                    -> hold 1.6 bar, record command, record intent
