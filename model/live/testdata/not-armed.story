# Nothing moves gas that was not armed, and arming runs out.
at 0.0s  cell A 1 bar
at 0.1s  go to 3 bar             -> record intent
expect notice refused: the bench is not armed
at 0.2s  arm                     -> record intent
expect mode armed
at 121s  tick
expect mode watching
at 121s  cell A 1 bar
at 121s  go to 3 bar             -> record intent
expect notice refused: the bench is not armed
