"""An invented plant of three-phase motors: its own machines, circuit, faults, meters and habits.

Shares no formula, table or chance with the models and rules that it is there to test: coils in
phase coordinates solved node by node, two rotor cages, a magnetising curve of straight pieces.
"""
