"""The questions: functions from a circuit and a solver to frozen results."""
