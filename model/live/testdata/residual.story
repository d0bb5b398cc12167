# A measured emission is laid over the prediction; a failed one leaves no trace.
at 0.0s  cell A 8 bar
at 0.0s  cell B 8 bar
at 0.1s  tick                    -> record prediction
at 0.2s  emission 265.5 nm       ->
expect residual 1.5 nm
at 0.3s  emission 300 nm failure ->
expect residual 1.5 nm
