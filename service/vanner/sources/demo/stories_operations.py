"""The stories planted in the operations room's archive, as written."""

from __future__ import annotations

from vanner.sources.demo.script import StoryScript, script

OPERATIONS_STORIES: tuple[StoryScript, ...] = (
    script(
        "Radar failure at the pilot station",
        "operations",
        "radar, magnetron, waveguide, modulator, sweep",
        5.0,
        """
watch-log | Pilot station radar: picture lost
Radar at the pilot station lost its picture; the sweep turns but shows nothing. Traffic is followed
by voice reports and with binoculars from the tower. Masters told to report at each buoy.

tickets | Radar pilot station dark, priority 1
Radar at the pilot station gives no echoes since the watch began. Self test ends with a modulator
fault. Technician called out. Kindly do not press the reset again, it has been pressed eleven times.

status-notes | Radar out of service
The radar of the pilot station is out of service. First finding: the magnetron draws no current,
although the modulator is on. Pilotage continues by day; for the dark hours see the restriction
that follows.

tickets | Radar: magnetron suspected, waveguide wet
Technician on site. Water stands in the waveguide below the rotating joint, about a teacup of it.
The magnetron was not amused and shows a burnt window. Sweep motor in order. Spare sought.

watch-log | Two ships held for want of radar
Two arrivals held outside for want of radar in the haze; both masters understanding, one of them at
length. The portable set on the launch serves as a stopgap, its sweep reaches barely three miles.

status-notes | Spare magnetron located
A spare magnetron is on its way by taxi, wrapped in a blanket. The waveguide has been dried with hot
air. The radar will stay off until the modulator has been checked against the manual.

tickets | Magnetron fitted, modulator reset
New magnetron fitted and warmed for thirty minutes as the label demands. Modulator reset, waveguide
flange sealed with new cord. The radar paints again; sweep and range rings agree with the
breakwater.

watch-log | Radar picture back, restriction lifted
Radar picture back on all displays, checked against the breakwater and the church. Held ships
brought in one after the other. Old magnetron on the desk as a paperweight, sweep logged as normal.
""",
    ),
    script(
        "Cooling water lost at the cold store",
        "operations",
        "coolant, chiller, strainer, compressor, jellyfish",
        6.0,
        """
status-notes | Cold store: chiller 2 shuts down
Chiller 2 at the cold store stopped on high temperature. Coolant flow fell to a third within ten
minutes. Chiller 1 carries the load alone. Chambers still at minus twenty two, doors to stay shut.

tickets | Chiller 2 hot, coolant valve will not open
The sea water valve of chiller 2 sticks at one quarter. Coolant outlet at fifty one degrees and
rising. Compressor stopped by hand. Fitter asked for, and his large spanner.

watch-log | Call from the cold store
The cold store reports a hot compressor and a strange smell of low tide. Fire panel quiet. Sea water
for the coolant circuit comes from the quay inlet; duty engineer sent to look at the strainer.

tickets | Strainer packed with jellyfish
Opened the strainer of the sea water inlet and found it packed with jellyfish, about two
wheelbarrows. The valve itself is sound; it could not close on what was in it. Coolant flow nil
during cleaning.

status-notes | Jellyfish at the inlet, chiller 1 limited
A drift of jellyfish lies along the quay. Chiller 1 runs at half load to spare its compressor. The
strainer is changed over every fifteen minutes. Owners of frozen peas have been informed.

watch-log | Hose laid for coolant
Harbour fire hose laid to the cold store to give the coolant circuit town water. Compressor 1 holds.
Jellyfish moving out with the ebb at the pace of jellyfish.

tickets | Chiller 2 running, strainer mesh ordered
Chiller 2 running again at full load, coolant at eighteen degrees. Coarser basket put before the
strainer. Compressor bearings felt by hand and found cool. The jellyfish went to the compost.
""",
    ),
    script(
        "Runaway queue in the berth planning system",
        "operations",
        "queue, backlog, duplicates, scheduler, deadlock",
        4.0,
        """
tickets | Berth planning: queue grows without end
Message queue of the berth planning system stands at forty thousand and grows by the minute. Users
see yesterday's plan. The scheduler log repeats one line, deadlock detected, rather insistently.

status-notes | Berth planning degraded
The berth planning system answers slowly. A backlog in the message queue delays every change by more
than an hour. Use the paper board. Do not send requests twice, duplicates make the queue longer.

watch-log | Same ship planned on nine berths
The planning screen shows one coaster on nine berths at once, evidently duplicates. Master asked
which he would like. Working from the paper board until the backlog is cleared.

tickets | Scheduler deadlock between two jobs
Cause narrowed down: two jobs of the scheduler wait for one another, a classic deadlock, and each
retry writes duplicates into the queue. Suggest stopping one. Volunteers for pressing the button?

status-notes | Scheduler stopped, queue is draining
The scheduler was stopped by hand and the deadlock is gone. The queue drains at nine hundred a
minute. The backlog should be worked off before the evening arrivals; duplicates are being removed.

tickets | Removing duplicates from backlog
Script removes duplicates from the backlog, sixty one thousand so far, dry run first. Queue now
below ten thousand. Scheduler stays off until the lock order has been mended and looked at by two.

watch-log | Plan and quay agree again
Screen, paper board and quay show the same ships for the first time since breakfast. Queue empty,
backlog nil. The scheduler has been restarted under observation, no deadlock seen.
""",
    ),
    script(
        "Phantom ships on the traffic display",
        "operations",
        "phantom, spoofed, jamming, transponder, satellite",
        5.0,
        """
watch-log | Phantom vessel on the display
Display shows a tanker of three hundred metres on the bowling green. Obviously a phantom; nothing
there by eye but bowlers. Transponder data otherwise well formed. Recording saved.

watch-log | Six more phantom tracks
Six further phantom tracks now cross the town at eleven knots in line ahead. Two real ships report
that their satellite fix jumped by miles. Jamming suspected. Visual bearings until further notice.

status-notes | Satellite positions unreliable
Satellite positions are unreliable within ten miles. Transponder tracks may be spoofed or displaced.
Pilots use bearings and leading lights. All phantom tracks are being tagged by hand.

tickets | Receiver tower: jamming on the satellite band
Spectrum shows strong jamming on the satellite band from the direction of the ring road. Tower clock
lost lock and runs free. Spoofed messages share one transponder number, which belongs to nobody.

status-notes | Filter against spoofed tracks
A filter now hides transponder reports that move over land. Eleven phantom ships are gone, among
them the one in the cemetery. Spoofed tracks at sea must still be judged by the officer.

watch-log | Van found with jamming box
Police stopped a delivery van with a jamming box in the cigarette lighter, meant to hide from its
own dispatcher. Satellite reception came back at once. The phantom fleet has dissolved.

tickets | Spoofed tracks: last checks
Clock has satellite lock again, drift corrected. Remaining question: the jamming explains lost
fixes, but not the spoofed transponder number. Recording of the phantom tracks handed over.
""",
    ),
)
