"""The designs of single-phase induction motors, by how the auxiliary winding is fed."""

SPLIT_PHASE = "split_phase"
CAPACITOR_START = "capacitor_start"
CAPACITOR_RUN = "capacitor_run"
CAPACITOR_START_RUN = "capacitor_start_run"
DESIGNS = (SPLIT_PHASE, CAPACITOR_START, CAPACITOR_RUN, CAPACITOR_START_RUN)
HAS_RUN_CAPACITOR = frozenset({CAPACITOR_RUN, CAPACITOR_START_RUN})
HAS_START_CAPACITOR = frozenset({CAPACITOR_START, CAPACITOR_START_RUN})
