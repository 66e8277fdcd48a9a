"""What a machine does: the case sheet as types, the nameplate, and the model of every machine kind."""
