# Filling above the stated pressure and venting each want their caution
# acknowledged, once while the bench is armed; HOLD and disarming end that.
at 0.0s  obey on
at 0.0s  caution above 2 bar
at 0.0s  cell A 1.9 bar
at 0.0s  run until 0.5s
at 0.5s  understood filling      -> record intent
expect notice refused: the bench is not armed
at 0.5s  arm
at 0.6s  go to 2.5 bar           -> record intent
expect notice the caution at filling has not been acknowledged
at 0.7s  understood filling      -> record intent
at 0.8s  go to 2.5 bar           -> record intent, record command, setpoint 2.1 bar
at 0.8s  run until 15s
expect mode steady
at 15s   go to 3 bar             -> record intent, record command, setpoint 2.7 bar
at 15s   run until 30s
expect mode steady
at 30s   steps 2.8bar 1bar       -> record intent
expect notice the caution at venting has not been acknowledged
at 30s   understood venting      -> record intent
at 30s   hold
at 30s   run until 31s
at 31s   arm
at 31s   steps 2.8bar 1bar       -> record intent
expect notice the caution at venting has not been acknowledged
