"""What the log does: line of thrust, actions along the beam, reactions of sled, mount and tool."""
