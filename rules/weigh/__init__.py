"""The inference: how readings, observations and the complaint are weighed against every fault."""
