"""partition: every degree of freedom as a ln q(T), and the model and table they make."""
