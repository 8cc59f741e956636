"""What readers see: decided once as plain content, then laid out for each kind of output."""
