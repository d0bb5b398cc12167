# A program that wants another pulse energy waits for a person, who confirms it;
# where a meter says otherwise the confirmation is not taken. Nothing but the
# person ends the waiting.
at 0.0s  obey on
at 0.0s  cell A 8 bar
at 0.0s  run until 0.5s
at 0.5s  confirm                 -> record intent
expect notice refused: no program waits for a confirmation
at 0.5s  arm
at 0.6s  energy 1.1 uJ
at 0.6s  run until 10s
expect mode settling because set the pulse energy in the fibre to 1.1 uJ, then confirm
at 10s   run until 60s
expect mode settling because set the pulse energy
at 60s   meter 1.3 uJ
at 60s   confirm                 -> record intent
expect notice meter reads 1.3 uJ and 1.1 uJ is asked for
at 61s   meter 1.12 uJ
at 61s   confirm                 -> record intent
expect mode settling because energy
at 61s   run until 66s
expect mode steady because settled
# What was confirmed need not be confirmed again.
at 66s   arm
at 66s   energy 1.1 uJ
at 66s   run until 76s
expect mode steady because settled
