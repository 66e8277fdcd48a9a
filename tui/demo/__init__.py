"""An invented plant, the Tern Point cannery: case sheets, and the plan of who took which when."""
