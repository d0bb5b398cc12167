# A program that ends before its first setpoint has gone out, because HOLD came
# within the last second, leaves the bench held: no controller keeps a setpoint
# that it never heard. The next ramp starts where the gas is by then, and not
# at the setpoint that was meant.
at 0.0s  cell A 5 bar
at 0.1s  arm
at 0.2s  go to 6 bar             -> record intent, record command, setpoint 5.2 bar
at 0.25s answer
at 0.3s  hold
expect setpoint 5 bar
at 0.35s answer
at 0.4s  arm
at 0.5s  go to 6 bar             -> record intent
at 0.6s  skip                    -> record intent, record intent
expect mode HOLD because valves shut at the end of go to 6 bar
at 1.5s  cell A 4.4 bar
at 1.5s  arm
at 1.6s  go to 6 bar             -> record intent, record command, setpoint 4.6 bar
