"""What traps can be built from what lies in the box."""
