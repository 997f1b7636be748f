"""Study a boat as a network: states, potentials, exposure, lengths, metering. Knows no limit."""
