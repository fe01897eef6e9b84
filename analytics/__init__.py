"""Numbers of Pricewake: series, growth rates and the lag between a driver and a response."""
