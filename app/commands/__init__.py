"""What each command does, one module per command: `run(context, args) -> exit code`."""
