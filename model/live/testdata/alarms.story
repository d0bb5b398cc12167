# A lost line raises its alarm after its delay; acknowledging it and its return
# bring it back to normal.
at 0.0s  obey on
at 0.0s  cell A 1 bar
at 0.0s  run until 8s
at 8.0s  link gauges down        -> record readback
at 8.0s  run until 9.95s
at 10.1s tick                    -> alarm line to gauges lost unacknowledged, bell, call
at 10.2s link gauges up
at 10.2s run until 11.5s
at 11.5s acknowledge line to gauges lost -> record intent, alarm line to gauges lost normal
