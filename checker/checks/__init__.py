"""Hold studies against limits: one function a check, one file a family."""
