"""Put outcomes in order, bind waivers, and hold the result that every output renders."""
