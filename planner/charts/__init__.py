"""What is drawn, without a painter: layouts of simple values into primitives that screen and paper both paint."""
