//! Roles from port names, over the headers that occur.

use super::*;
use crate::parts::library::Library;

/// Ports of a definition against roles, `-` where the name says nothing.
#[track_caller]
fn check(profile: &str, ports: &str, roles: &str) {
    let library = Library::bundled();
    let profile = library.profile(profile).unwrap();
    let ports: Vec<_> = ports.split_whitespace().collect();
    let found = profile.ports.roles(&ports, profile.array.channels, profile.supply.is_some());
    let text: Vec<_> = found.roles.iter().map(|role| role.map_or("-".to_owned(), |role| role.to_string())).collect();
    assert_eq!(text.join(" "), roles, "{ports:?}");
}

#[test]
fn whole_arrays_read_by_their_port_names() {
    let seven = "in1 in2 in3 in4 in5 in6 in7 emitter clamp out7 out6 out5 out4 out3 out2 out1";
    for ports in [
        "B[1] B[2] B[3] B[4] B[5] B[6] B[7] E COM C[7] C[6] C[5] C[4] C[3] C[2] C[1]",
        "1B 2B 3B 4B 5B 6B 7B GND COM 7C 6C 5C 4C 3C 2C 1C",
        "IN1 IN2 IN3 IN4 IN5 IN6 IN7 GND COMMON_WHEELING_FREE_DIODES OUT7 OUT6 OUT5 OUT4 OUT3 OUT2 OUT1",
        "I1 I2 I3 I4 I5 I6 I7 GND COM O7 O6 O5 O4 O3 O2 O1",
        "in1 in2 in3 in4 in5 in6 in7 gnd com out7 out6 out5 out4 out3 out2 out1",
        "IN0 IN1 IN2 IN3 IN4 IN5 IN6 VEE VCC OUT6 OUT5 OUT4 OUT3 OUT2 OUT1 OUT0",
    ] {
        check("x2003", ports, seven);
    }
    check(
        "x2803",
        "1B 2B 3B 4B 5B 6B 7B 8B VEE CO 8C 7C 6C 5C 4C 3C 2C 1C",
        "in1 in2 in3 in4 in5 in6 in7 in8 emitter clamp out8 out7 out6 out5 out4 out3 out2 out1",
    );
    check("x2003", "IN1 IN2 IN8 FOO", "in1 in2 - -");
    check("x75452", "1A 1B 1Y GND 2Y 2A 2B VCC", "in1 in1b out1 emitter out2 in2 in2b supply");
    check("x7406", "1A 1Y 2A 2Y VCC GND", "in1 out1 in2 out2 supply emitter");
    check(
        "x6b595",
        "VCC SERIN DRAIN0 DRAIN7 /SRCLR /G GND RCK SRCK SEROUT",
        "supply serial_in out1 out8 clear_n enable_n emitter register_clock shift_clock serial_out",
    );
    check("x2068", "K1 C1 B1 E B2 C2 K2 VS", "clamp out1 in1 emitter in2 out2 clamp2 supply");
}

#[test]
fn cells_and_gates_read_as_one_channel() {
    check("x2803", "B C E CO", "in1 out1 emitter clamp");
    check("x7406", "A Y DPWR DGND", "in1 out1 supply emitter");
    check("x75453", "A B Y", "in1 in1b out1");
    check("x2003", "B C E", "in1 out1 emitter");
}

#[test]
fn roles_print_as_they_are_written() {
    for text in ["in3", "in3b", "out12", "emitter", "clamp", "clamp2", "supply", "enable_n", "serial_out", "nc"] {
        assert_eq!(Role::of(text).unwrap().to_string(), text);
    }
    for text in ["in", "in0", "out", "in300", "", "pin1"] {
        assert_eq!(Role::of(text), None, "{text}");
    }
}
