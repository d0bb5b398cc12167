# A target above the lowest rating is refused by name and number.
at 0.0s  cell A 1 bar
at 0.1s  arm
at 0.2s  go to 16.1 bar          -> record intent
expect notice setpoint 16.1 bar, fibre seal allows 0 bar to 16 bar
expect mode armed
