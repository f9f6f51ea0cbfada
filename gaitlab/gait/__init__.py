"""One walk: the step loop, its outcomes, and the measures read from the recorded motion."""
