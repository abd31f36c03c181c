"""The loops of the reference set. All of them are invented.

Keys: plant, controller, map (absent: the controller is a z model), at (prewarped,
rad/s), sensor, dead_time, sine (frequency of the sine input), timings: one dictionary
per rate with conversion, compute, update as in a loop file; an update that is a time
is {after: time}. plain(...) gives rates without any delay.
"""


def plain(*rates):
    return [{"rate": r} for r in rates]


def ready(rate, conversion, compute):
    return {"rate": rate, "conversion": conversion, "compute": compute}


def late(rate, update, conversion="0 s", compute="0 s"):
    return {"rate": rate, "conversion": conversion, "compute": compute, "update": update}


KA36 = dict(  # type 2, order 7, Ka = 36, two slow modes with zeros near them
    plant="(1.1*s + 1)*(0.6*s + 1)/(s^2*(s + 1)*(0.5*s + 1)*(0.01*s + 1))",
    controller="36*(0.4*s + 1)/(0.02*s + 1)",
    sensor="1/(0.004*s + 1)",
)

ORDER12 = dict(  # type 1: plant 8, sensor 2, controller 2
    plant="2*(0.2*s + 1)/(s*(0.5*s + 1)*(0.03*s + 1)*(0.02*s + 1)*(0.007*s + 1)*(0.004*s + 1)*(s^2/40000 + s/250 + 1))",
    controller="(0.48*s + 1)*(0.05*s + 1)/((0.006*s + 1)*(0.0025*s + 1))",
    sensor="1/((0.0009*s + 1)*(0.0003*s + 1))",
)

LOOPS = [
    # Type 0
    dict(name="one lag", plant="1/(s + 1)", controller="3", map="tustin", sine="0.5 rad/s",
         timings=plain("10 Hz", "1 kHz")),
    dict(name="one lag, half a tick", plant="1/(s + 1)", controller="1.2", map="tustin", sine="0.8 rad/s",
         timings=[ready("1 Hz", "200 ms", "300 ms")]),
    dict(name="two lags with sensor lag", plant="2.4/((0.9*s + 1)*(0.12*s + 1))", controller="2.5", map="tustin",
         sensor="1/(0.04*s + 1)", sine="1.5 rad/s", timings=[ready("50 Hz", "1 ms", "4 ms"), ready("2.5 kHz", "10 us", "130 us")]),
    dict(name="four lags, lag compensator", plant="1/((s + 1)*(0.3*s + 1)*(0.1*s + 1)*(0.03*s + 1))",
         controller="4*(2*s + 1)/(5*s + 1)", map="tustin", timings=[late("40 Hz", "next_tick"), late("1 kHz", "next_tick")]),
    dict(name="exactly double pole", plant="5/(0.2*s + 1)^2", controller="0.8*(0.1*s + 1)/(0.01*s + 1)", map="matched",
         timings=[ready("100 Hz", "0 s", "3.7 ms"), ready("20 kHz", "1 us", "3 us")]),
    dict(name="exactly fivefold pole", plant="1/(0.1*s + 1)^5", controller="1.1", map="tustin",
         timings=plain("25 Hz", "10 kHz")),
    dict(name="nearly double pole", plant="40/((s + 2)*(s + 2.000001))", controller="0.7*(s + 9)/(s + 30)", map="backward",
         timings=[ready("200 Hz", "0 s", "1.3 ms"), ready("1 MHz", "100 ns", "300 ns")]),
    dict(name="sensor gain ten", plant="3/(0.02*s + 1)", controller="0.9/(0.002*s + 1)", map="hold", sensor="10/(0.0005*s + 1)",
         sine="40 rad/s", timings=[ready("5 kHz", "3 us", "40 us"), ready("500 kHz", "300 ns", "1 us")]),
    dict(name="inverting plant", plant="-8/((0.5*s + 1)*(0.05*s + 1))", controller="-0.6*(0.45*s + 1)/(0.02*s + 1)",
         map="forward", timings=[ready("400 Hz", "0 s", "1 ms"), ready("40 kHz", "1 us", "11 us")]),
    dict(name="right half plane zero", plant="(1 - 0.05*s)/((0.4*s + 1)*(0.1*s + 1))", controller="1.5", map="tustin",
         timings=plain("60 Hz", "3 kHz")),
    dict(name="plant with feedthrough", plant="(0.02*s + 1)/(0.5*s + 1)", controller="6/(0.05*s + 1)", map="triangle",
         timings=[ready("100 Hz", "0 s", "2 ms"), ready("7 kHz", "0 s", "31 us")]),
    # Type 1
    dict(name="integrator and lag", plant="1/(s*(s + 1))", controller="1", map="tustin", sine="0.3 rad/s",
         timings=[ready("1 Hz", "0 s", "0 s"), late("2 Hz", "next_tick"), ready("100 Hz", "0 s", "4 ms")]),
    dict(name="integrator and lag, one tick late, unstable", plant="1/(s*(s + 1))", controller="1", map="tustin",
         timings=[late("1 Hz", "next_tick")]),
    dict(name="winch drum", plant="17.2/(s*(s + 5))", controller="4.2*(0.21*s + 1)/(0.011*s + 1)", map="tustin",
         sensor="1/(0.0004*s + 1)", sine="6 rad/s", timings=[ready("2 kHz", "6 us", "140 us"), ready("200 Hz", "6 us", "2 ms")]),
    dict(name="winch drum, prewarped", plant="17.2/(s*(s + 5))", controller="4.2*(0.21*s + 1)/(0.011*s + 1)", map="prewarped",
         at="15 rad/s", sensor="1/(0.0004*s + 1)", timings=[ready("150 Hz", "6 us", "140 us"), ready("30 kHz", "2 us", "14 us")]),
    dict(name="winch drum, matched", plant="17.2/(s*(s + 5))", controller="4.2*(0.21*s + 1)/(0.011*s + 1)", map="matched",
         sensor="0.5/(0.0004*s + 1)", timings=[ready("300 Hz", "6 us", "140 us")]),
    dict(name="winch drum, forward", plant="17.2/(s*(s + 5))", controller="4.2*(0.21*s + 1)/(0.011*s + 1)", map="forward",
         timings=[late("500 Hz", "1.5 ms", "6 us", "140 us")]),
    dict(name="winch drum, backward", plant="17.2/(s*(s + 5))", controller="4.2*(0.21*s + 1)/(0.011*s + 1)", map="backward",
         timings=[late("500 Hz", "1.5 ms", "6 us", "140 us")]),
    dict(name="winch drum, hold", plant="17.2/(s*(s + 5))", controller="4.2*(0.21*s + 1)/(0.011*s + 1)", map="hold",
         timings=[late("500 Hz", "1.5 ms", "6 us", "140 us")]),
    dict(name="winch drum, triangle", plant="17.2/(s*(s + 5))", controller="4.2*(0.21*s + 1)/(0.011*s + 1)", map="triangle",
         timings=[late("500 Hz", "1.5 ms", "6 us", "140 us")]),
    dict(name="velocity loop, proportional and integral", plant="12/(0.08*s + 1)", controller="0.35*(s + 12)/s", map="tustin",
         sensor="1/(0.003*s + 1)", sine="5 rad/s", timings=[ready("250 Hz", "20 us", "900 us"), ready("100 kHz", "1 us", "3 us")]),
    dict(name="velocity loop, backward", plant="12/(0.08*s + 1)", controller="0.35*(s + 12)/s", map="backward",
         timings=[late("250 Hz", "next_tick")]),
    dict(name="velocity loop, triangle", plant="12/(0.08*s + 1)", controller="0.35*(s + 12)/s", map="triangle",
         timings=[ready("250 Hz", "0 s", "1.1 ms")]),
    dict(name="velocity loop, matched", plant="12/(0.08*s + 1)", controller="0.35*(s + 12)/s", map="matched",
         timings=[ready("250 Hz", "0 s", "1.1 ms")]),
    dict(name="pure integral on one lag", plant="2/(0.01*s + 1)", controller="20/s", map="hold", sine="12 rad/s",
         timings=[ready("500 Hz", "0 s", "700 us"), ready("10 MHz", "20 ns", "55 ns")]),
    dict(name="integral with matched map", plant="1/((0.2*s + 1)*(0.03*s + 1))", controller="2*(0.19*s + 1)/(s*(0.01*s + 1)*(0.004*s + 1))",
         map="matched", timings=[ready("400 Hz", "100 us", "700 us")]),
    dict(name="four poles PID", plant="6/((0.5*s + 1)*(0.06*s + 1)*(0.008*s + 1))", controller="0.9*(0.45*s + 1)*(0.07*s + 1)/(s*(0.005*s + 1))",
         map="tustin", sensor="1/(0.002*s + 1)", timings=[ready("1 kHz", "10 us", "350 us"), ready("1 MHz", "100 ns", "400 ns")]),
    dict(name="converter stage", plant="24*(0.00001*s + 1)/(0.0000000022*s^2 + 0.000012*s + 1)",
         controller="180*(0.00004*s + 1)/(s*(0.0000004*s + 1))", map="tustin", sensor="0.2/(0.000001*s + 1)",
         timings=[ready("500 kHz", "200 ns", "700 ns"), ready("10 MHz", "20 ns", "60 ns")]),
    dict(name="current loop", plant="1/(0.00035*s + 0.8)", controller="1.4*(0.0004*s + 1)/s*900*(0.00002*s + 1)/(0.00001*s + 1)",
         map="tustin", sensor="1/(0.000004*s + 1)", timings=[late("20 kHz", "next_tick"), ready("250 kHz", "500 ns", "2 us")]),
    # Dead time
    dict(name="oven zone with dead time", plant="1.6/((9*s + 1)*(1.2*s + 1))", controller="1.4*(8*s + 1)/s*0.12", map="tustin",
         dead_time="600 ms", sensor="1/(0.4*s + 1)", timings=[ready("10 Hz", "2 ms", "8 ms"), ready("1 Hz", "2 ms", "48 ms")]),
    dict(name="dead time of 3.4 ticks", plant="1/(0.5*s + 1)", controller="0.9*(0.5*s + 1.1)/s", map="backward",
         dead_time="68 ms", sine="1.1 rad/s", timings=[ready("50 Hz", "1 ms", "3 ms")]),
    dict(name="dead time of 37 ticks", plant="1.2/(0.3*s + 1)", controller="1.1*(0.25*s + 1)/s", map="tustin",
         dead_time="370 ms", timings=[ready("100 Hz", "0 s", "0 s"), ready("100 Hz", "1 ms", "3.5 ms")]),
    dict(name="dead time of 1000 ticks", plant="0.7/(0.4*s + 1)", controller="0.9*(0.35*s + 1)/s", map="tustin",
         dead_time="500 ms", timings=[ready("2 kHz", "0 s", "0 s"), ready("2 kHz", "20 us", "130 us")]),
    dict(name="integrating plant, dead time of 250 ticks", plant="0.8/(s*(0.02*s + 1))", controller="1.1", map="tustin",
         dead_time="250 ms", sensor="1/(0.005*s + 1)", timings=[late("1 kHz", "next_tick")]),
    dict(name="dead time of 10000 ticks", plant="1/(2*s + 1)", controller="0.6*(1.8*s + 1)/s", map="triangle",
         dead_time="1 s", timings=[ready("10 kHz", "5 us", "40 us")]),
    # Lightly damped modes
    dict(name="flexible mode, gain stabilized", plant="30*160000/(s*(s + 4)*(s^2 + 0.8*s + 160000))", controller="0.5*(0.2*s + 1)/(0.02*s + 1)",
         map="tustin", timings=[ready("3 kHz", "4 us", "90 us"), ready("100 kHz", "1 us", "4 us")]),
    dict(name="flexible mode with its zeros", plant="25*(s^2/8100 + 0.002*s/90 + 1)/(s*(0.3*s + 1)*(s^2/14400 + 0.002*s/120 + 1))",
         controller="(0.27*s + 1)/(0.01*s + 1)", map="tustin", sensor="1/(0.0005*s + 1)",
         timings=[ready("2 kHz", "10 us", "60 us"), ready("700 Hz", "10 us", "60 us")]),
    dict(name="flexible mode under a notch", plant="40/(s*(0.1*s + 1)*(s^2/90000 + 0.002*s/300 + 1))",
         controller="0.4*(0.11*s + 1)*(s^2/90000 + 0.03*s/300 + 1)/((0.004*s + 1)*(s^2/90000 + 1.2*s/300 + 1))", map="prewarped", at="300 rad/s",
         timings=[ready("4 kHz", "5 us", "30 us"), ready("60 kHz", "2 us", "8 us")]),
    dict(name="two flexible modes", plant="9/((0.4*s + 1)*(s^2/2500 + 0.002*s/50 + 1)*(s^2/250000 + 0.002*s/500 + 1))", controller="0.008*(0.38*s + 1)/s",
         map="tustin", timings=[ready("5 kHz", "0 s", "120 us")]),
    # Type 2
    dict(name="double integrator, lead", plant="1/s^2", controller="9*(0.8*s + 1)/(0.05*s + 1)", map="tustin", sine="1 rad/s",
         timings=[ready("100 Hz", "0 s", "0 s"), ready("100 Hz", "500 us", "6 ms"), ready("10 kHz", "5 us", "25 us")]),
    dict(name="Ka of 36", map="tustin", timings=[late("1 kHz", "next_tick"), ready("100 kHz", "1 us", "4 us"), ready("1 MHz", "100 ns", "400 ns"), ready("10 MHz", "10 ns", "50 ns")], **KA36),
    dict(name="Ka of 36, matched", map="matched", timings=[ready("100 kHz", "1 us", "4 us"), late("1 MHz", "next_tick")], **KA36),
    dict(name="integrating plant, proportional and integral", plant="5/(s*(0.02*s + 1))", controller="2*(s + 1.5)/s", map="tustin",
         sensor="1/(0.002*s + 1)", sine="2 rad/s", timings=[ready("200 Hz", "100 us", "1.9 ms"), ready("50 kHz", "1 us", "7 us")]),
    dict(name="integrating plant, forward", plant="5/(s*(0.02*s + 1))", controller="2*(s + 1.5)/s", map="forward",
         timings=[ready("200 Hz", "0 s", "0 s")]),
    dict(name="integrating plant, hold", plant="5/(s*(0.02*s + 1))", controller="2*(s + 1.5)/s", map="hold",
         timings=[ready("250 Hz", "0 s", "1.7 ms")]),
    dict(name="digital and plant integrator", plant="1/s", controller="(1.2*s + 0.5)/s", map="backward",
         timings=[ready("4 Hz", "0 s", "0 s"), ready("4 Hz", "20 ms", "80 ms")]),
    dict(name="two digital integrators", plant="3/(0.05*s + 1)", controller="4*(0.6*s + 1)*(0.05*s + 1.02)/(s^2*(0.004*s + 1))", map="tustin",
         timings=[ready("100 Hz", "200 us", "3 ms"), ready("10 kHz", "2 us", "30 us")]),
    dict(name="two digital integrators, triangle", plant="3/(0.05*s + 1)", controller="4*(0.6*s + 1)*(0.05*s + 1.02)/(s^2*(0.004*s + 1))", map="triangle",
         timings=[ready("150 Hz", "200 us", "3 ms")]),
    dict(name="order nine, type two", plant="2/(s^2*(0.01*s + 1)*(0.004*s + 1)*(s^2/160000 + s/1000 + 1))",
         controller="8*(0.5*s + 1)/((0.012*s + 1)*(0.001*s + 1))", map="tustin", sensor="1/(0.0006*s + 1)",
         timings=[ready("2 kHz", "10 us", "100 us"), ready("100 kHz", "1 us", "4 us"), ready("1 MHz", "200 ns", "500 ns")]),
    # Type 3
    dict(name="type three", plant="1/(s^2*(0.01*s + 1))", controller="20*(0.9*s + 1)*(1.1*s + 1)/(s*(0.01*s + 1.03))", map="tustin", sine="1.5 rad/s",
         timings=[ready("500 Hz", "0 s", "400 us"), ready("20 kHz", "2 us", "9 us"), ready("1 MHz", "100 ns", "400 ns")]),
    dict(name="type three, sensor lag", plant="6/(s*(0.02*s + 1))", controller="3*(0.9*s + 1)*(0.8*s + 1)/(s^2*(0.003*s + 1))", map="triangle",
         sensor="1/(0.001*s + 1)", timings=[ready("1 kHz", "10 us", "300 us"), ready("30 kHz", "1 us", "10 us")]),
    dict(name="type three, three digital integrators", plant="1/(0.1*s + 1)", controller="300*(0.2*s + 1)*(0.25*s + 1)*(0.1*s + 1.01)/(s^3*(0.001*s + 1)*(0.0008*s + 1))",
         map="matched", timings=[late("2 kHz", "400 us", "10 us", "200 us")]),
    # Unstable plants, conditionally stable loops
    dict(name="unstable plant", plant="4/((s - 1)*(0.05*s + 1))", controller="1.5*(0.2*s + 1)/(0.01*s + 1)", map="tustin",
         sensor="1/(0.004*s + 1)", timings=[ready("100 Hz", "0 s", "3 ms"), ready("25 kHz", "1 us", "12 us")]),
    dict(name="levitated mass", plant="50/(s^2 - 900)", controller="40*(0.04*s + 1)/(0.002*s + 1)", map="tustin",
         timings=[ready("2 kHz", "5 us", "120 us"), ready("200 kHz", "500 ns", "2 us")]),
    dict(name="unstable pair with integral", plant="30/(s^2 - 0.4*s + 9)", controller="3*(s^2 + 2.5*s + 4)/(s*(0.02*s + 1))", map="prewarped", at="3 rad/s",
         timings=[ready("125 Hz", "0 s", "2 ms")]),
    dict(name="conditionally stable", plant="5/(s*(10*s + 1)^2)", controller="96*(s + 1)^2/(0.01*s + 1)^2", map="tustin",
         timings=[ready("300 Hz", "0 s", "500 us"), ready("50 kHz", "1 us", "4 us")]),
    dict(name="conditionally stable, triple integrator", plant="1/s^3", controller="60*(0.7*s + 1)^2/(0.01*s + 1)^2", map="tustin",
         timings=[ready("400 Hz", "0 s", "600 us"), ready("1 MHz", "100 ns", "300 ns")]),
    dict(name="unstable for want of phase", plant="1/(s^2*(0.2*s + 1))", controller="2", map="tustin", timings=[ready("50 Hz", "0 s", "4 ms")]),
    # High order
    dict(name="order twelve, type one", map="tustin", timings=[ready("2 kHz", "10 us", "150 us"), ready("100 kHz", "1 us", "4 us"), ready("10 MHz", "20 ns", "50 ns")], **ORDER12),
    dict(name="order twelve, matched", map="matched", timings=[ready("5 kHz", "10 us", "70 us")], **ORDER12),
    dict(name="order eleven, type zero, sixfold pole", plant="20*(0.02*s + 1)/((0.01*s + 1)^6*(s + 1)*(0.5*s + 1))", controller="0.15*(0.6*s + 1)/(0.05*s + 1)",
         map="tustin", sensor="1/((0.002*s + 1)*(0.001*s + 1))", timings=[ready("500 Hz", "20 us", "900 us"), ready("1 MHz", "100 ns", "400 ns")]),
    dict(name="spread over seven decades", plant="1000/((1000*s + 1)*(s + 1)*(0.0001*s + 1))", controller="0.4*(0.9*s + 1)/(0.00001*s + 1)",
         map="backward", timings=[ready("100 kHz", "500 ns", "3 us")]),
    # Digital controllers
    dict(name="controller in z", plant="1/(s*(s + 1))", controller="1.5*(z - 0.6)/(z + 0.2)", sine="0.4 rad/s", timings=plain("2 Hz")),
    dict(name="controller in z with integrator", plant="4/((0.3*s + 1)*(0.02*s + 1))", controller="0.5*(z - 0.94)/(z - 1)", sensor="1/(0.01*s + 1)",
         timings=[ready("50 Hz", "1 ms", "6 ms")]),
    dict(name="controller in z that keeps type", plant="1/s", controller="(0.31*z - 0.3)/((z - 1)*(z - 0.25))", timings=[late("20 Hz", "next_tick")]),
]
