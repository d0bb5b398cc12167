# A program that begins by holding takes the gas over where it is.
at 0.0s  obey on
at 0.0s  cell A 5 bar
at 0.0s  run until 0.5s
at 0.5s  arm
at 0.6s  stay                    -> record intent, record command, setpoint 5 bar
at 0.6s  run until 10s
expect mode settling because staying
at 10s   run until 20s
expect mode steady because settled
expect setpoint 5 bar
