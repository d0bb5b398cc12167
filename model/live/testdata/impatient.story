# Whoever asks for one target after the other does not make the setpoint run
# faster than the rate: one step a second, whatever is asked.
at 0.0s  cell A 1 bar
at 0.1s  arm
at 0.2s  go to 5 bar             -> record intent, record command, setpoint 1.2 bar
at 0.3s  answer
at 0.4s  go to 6 bar             -> record intent
at 0.5s  go to 7 bar             -> record intent
at 0.6s  tick
expect setpoint 1.2 bar
at 1.2s  tick                    -> record command, setpoint 1.4 bar
