"""The screens, one file each."""
