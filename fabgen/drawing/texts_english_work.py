"""English texts for the work: wire, assembly steps, bench, mounting, cautions, limits.

Depends on: nothing.
"""

from __future__ import annotations

WORK: dict[str, str] = {
    "wire.head": "Straight wire: {length} mm of ⌀{diameter} mm",
    "wire.how": (
        "Mark the straight wire from end A with a fine pen, never with a scriber: a scratch is where it breaks. "
        "The grey zones bend; what lies between them stays straight. Distances in millimetres from end A."
    ),
    "wire.end_a": "end A",
    "wire.end_b": "end B",
    "wire.start": "bend {number} begins",
    "wire.stop": "bend {number} ends",
    "wire.no": "Bend",
    "wire.bend": "Name",
    "wire.from": "From",
    "wire.to": "To",
    "wire.angle": "Angle",
    "wire.radius": "Axis radius",
    "wire.mandrel": "Mandrel ⌀",
    "wire.plane": "Turn",
    "wire.order": "Order",
    "wire.table_head": "Bend table (mm; in order along the wire, each turn from the row above)",
    "wire.work_head": "Work",
    "wire.step_cut": "Straighten the wire and cut it to {length} mm.",
    "wire.step_mark": "Mark all distances from end A.",
    "wire.step_mark_beyond": "Mark A and B {beyond} mm inside the cut ends, and all distances from the mark A.",
    "wire.no_turn": "keep the wire in the plane of the bend just made, its bent end to the same side; ",
    "wire.turn": "turn the wire by {plane}° about its own axis from the bend just made; ",
    "wire.step_bend": (
        "Bend {number}: {turn}bend it round a mandrel of {mandrel} mm diameter until it stands at {angle}° after it "
        "is let go."
    ),
    "wire.step_check": "Lay the wire on the true-scale page and correct it until it covers the drawing.",
    "wire.step_end": "Ends: {preparation}.",
    "true.head": "Print at 100 %, no fitting to the page",
    "true.print": "Lay a ruler on both bars: each must be 100 mm long. If not, set the print scale to 100 %.",
    "true.tile": "Tile {tile} of {first} to {last}. Check both bars; join so that crosses and fine lines meet.",
    "true.bar": "100 mm",
    "true.drill": "Template: {part}",
    "true.foil": "Foil pattern: {part}",
    "true.wire": "Bent shape: {part}",
    "true.capacitor": "True size: coax and capacitor",
    "true.thick": "{part}, {thickness} mm thick",
    "true.near": "Holes at the bars only (whole: {tiles} tiles). Line y = 0 runs from the middle to the gap's notch.",
    "true.too_large": "This part would need {tiles} tiles; work from the part drawing or the cutting file instead.",
    "assembly.head": "Assembly in steps",
    "assembly.intro": (
        "New parts are drawn in wide lines with their item numbers, what is there already in narrow grey ones; "
        "close-ups leave the wall out, and of many equal screws one is drawn. "
        "Do not go on before the measurement at the end of a step is right."
    ),
    "assembly.item": "({item}) {part}, {quantity} off",
    "assembly.do": "Do:",
    "assembly.tools": "Tools:",
    "assembly.caution": "Caution:",
    "assembly.coating": "{lining}, {thickness} mm thick",
    "assembly.join": "Joint:",
    "assembly.measure": "Measure before going on:",
    "step.tool.title": "{n}. Forms and test bend",
    "step.tool.do": (
        "Print the bending forms. Cut and bend the test strip first when the sheet or the brake is new, and put the "
        "K that it gives into the job."
    ),
    "step.tool.tools": "printer, brake or vice with a bending bar, calliper.",
    "step.tool.strip.do": (
        "Cut and bend the test strip first when the sheet or the brake is new, and put the K that it gives into the "
        "job."
    ),
    "step.tool.strip.tools": "brake or vice with a bending bar, calliper.",
    "step.tool.strip.title": "{n}. Test bend",
    "step.tool.form.title": "{n}. Bending forms",
    "step.tool.form.do": "Print the bending forms and take off strings; bend a piece of spare wire over each first.",
    "step.tool.form.tools": "printer, vice, protractor, calliper.",
    "step.tool.form.measure": "angle and radius of the spare bends after letting go, as on the wire schedule.",
    "step.tool.measure": "flange of the test strip after bending, as on its page.",
    "step.body.title": "{n}. Floor and flange",
    "step.body.do": "Deburr all edges. Mark the direction of the gap (+x) and the floor's inner face on the part.",
    "step.body.tools": "fine file, countersink, calliper, marker.",
    "step.body.measure": "hole pattern against the template; floor flat within 0.5 mm.",
    "step.body.printed.title": "{n}. Printed can",
    "step.body.printed.do": "Print, let cool on the bed, take off strings, and open the holes to size by hand.",
    "step.body.printed.tools": "printer, hand reamers, calliper.",
    "step.body.printed.measure": (
        "inside diameter in two directions and depth; both within the tolerance on the part's page."
    ),
    "step.body.pieces.title": "{n}. Printed can",
    "step.body.pieces.do": (
        "Print the pieces, let them cool on the bed, take off strings, and open the holes to size by hand. Join them "
        "on a flat plate with epoxy and the screws through the ears; smooth the joints inside."
    ),
    "step.body.pieces.tools": "printer, hand reamers, flat plate, epoxy, abrasive paper, calliper.",
    "step.body.pieces.caution": "gloves for the epoxy; sand wet, with a mask.",
    "step.body.pieces.measure": (
        "inside diameter in four directions and depth; both within the tolerance on the part's page."
    ),
    "step.body.turned.title": "{n}. Turned can",
    "step.body.turned.do": "Turn, drill and deburr. Mark the direction of the gap (+x) on the flange.",
    "step.body.turned.tools": "lathe, drill, inside micrometer or calliper.",
    "step.body.turned.measure": "bore {bore} mm and depth {depth} mm.",
    "step.wall.title": "{n}. Wall",
    "step.wall.do": (
        "Form the wall, close its seam in the E-plane (on the y axis, 90° from the gap), and set it centrally on "
        "the floor."
    ),
    "step.wall.tools": "clamps, square, rule; soldering iron or torch, or rivets.",
    "step.wall.join": "continuous contact to the floor all round: current crosses this joint everywhere.",
    "step.wall.tube.do": "Set the tube square and centred on the floor, inside the marks, and hold it down.",
    "step.wall.tube.tools": "clamps or a heavy plate, square, rule.",
    "step.wall.tube.join": (
        "solder, weld, or silver-filled epoxy without a gap all round: current crosses this joint everywhere."
    ),
    "step.wall.tube-bond.join": (
        "this metal takes no soft solder: weld, or silver-filled epoxy without a gap all round: current crosses this "
        "joint everywhere."
    ),
    "step.wall.bond.join": (
        "screws or rivets in every tab, bright metal below them; conductive sealant in the corner: current crosses "
        "this joint everywhere."
    ),
    "step.wall.solder.join": "soft solder all round inside, without a gap: current crosses this joint everywhere.",
    "step.wall.measure": (
        "inside diameter {bore} mm in four directions; depth {depth} mm; under 0.01 ohm floor to rim."
    ),
    "step.lining.title": "{n}. Lining",
    "step.lining.foil.do": "Line floor and wall ({lining}); overlap floor and wall so that they touch all round.",
    "step.lining.foil.tools": "knife, roller, multimeter.",
    "step.lining.foil.caution": (
        "foil edges cut like a knife. Solder in moving air and for a short time: hot plastic gives off fumes."
    ),
    "step.lining.foil.join": (
        "foil over foil by 10 mm or more, rubbed down; solder or conductive glue across each overlap."
    ),
    "step.lining.foil.measure": "under {limit} ohm between any two points, above all from floor to rim.",
    "step.lining.paint.do": (
        "Sand the inside matt, wet; wipe it with alcohol and let it dry. Mask the outside. Put {lining} on floor and "
        "wall, over the rim and through the holes, in thin coats crosswise, to {thickness} mm dry; let each coat dry "
        "as its maker says."
    ),
    "step.lining.paint.tools": (
        "wet abrasive paper, alcohol, masking tape, brush or spray gun, breathing mask, gloves, multimeter."
    ),
    "step.lining.paint.caution": (
        "fumes of solvent: open air or suction, no flame or spark, mask with a vapour filter. Metal dust: sand wet, "
        "mask with a particle filter, keep waste out of the drain."
    ),
    "step.lining.paint.join": "an unbroken coat in the corner of floor and wall all round, and round every hole.",
    "step.lining.paint.measure": (
        "from the floor's middle to four points of the rim, probes flat on the paint: about {expected} ohm, none "
        "above {limit} ohm; as much across the floor. Another coat where it is more."
    ),
    "step.lining.plating.do": (
        "Degrease the print, brush conductive primer on floor and wall, over the rim and through the holes, let it "
        "dry, and have it plated ({lining}) to {thickness} mm or more. Rinse, and dry without heat."
    ),
    "step.lining.plating.tools": "primer, brush, plating bath or a plating shop, goggles, gloves, scales, multimeter.",
    "step.lining.plating.caution": (
        "bath and its mist burn and poison: goggles, gloves, apron, suction. Primer fumes: open air, no flame. Dust: "
        "sand wet, with a mask. Spent bath is dangerous waste."
    ),
    "step.lining.plating.join": (
        "primer without a gap in the corner of floor and wall and in every hole: copper grows on nothing else."
    ),
    "step.lining.plating.measure": (
        "from the floor's middle to four points of the rim under {limit} ohm; the can gains {gain} g or more."
    ),
    "step.choke.title": "{n}. Choke ring",
    "step.choke.do": "Set the ring round the can at the height on the general arrangement.",
    "step.choke.tools": "height gauge or blocks, clamps.",
    "step.choke.join": "continuous contact of the ring's floor to the can all round.",
    "step.choke.printed.do": (
        "Line the ring's floor and wall and the can's wall inside the ring as in the step before. Set the ring on the "
        "can and screw it down."
    ),
    "step.choke.foil.do": (
        "Set the ring on the can. Line the can's wall inside it, the ring's wall, then its floor over both laps, as in "
        "the step before. Screw the ring down through the lining."
    ),
    "step.choke.printed.tools": "screwdriver or hexagon key, what the lining needs.",
    "step.choke.printed.caution": "as for the lining.",
    "step.choke.printed.join": "the lining of ring and can joined all round at the ring's floor.",
    "step.choke.printed.measure": "gap equal in four directions within 0.5 mm; under {limit} ohm ring to can.",
    "step.choke.level.title": "{n}. Wall of the choke",
    "step.choke.level.do": (
        "Form the outer wall and close its seam like the can's, set it on the same floor over its row of holes, round "
        "the can and centred on it."
    ),
    "step.choke.level.tools": "clamps, calliper; soldering iron or torch, or rivets.",
    "step.choke.level.join": "as the can's wall: continuous contact to the floor all round.",
    "step.choke.level.measure": (
        "gap between both walls equal in four directions within 0.5 mm; under 0.01 ohm floor to rim."
    ),
    "step.choke.measure": "height in four places within 0.5 mm; under 0.01 ohm ring to can.",
    "step.loop.title": "{n}. Loop and bars",
    "step.loop.wire.do": (
        "Put both feet through the floor with the gap towards +x. Set the loop level on blocks {height} mm high to "
        "the wire's axis, then fix the feet."
    ),
    "step.loop.sheet.do": (
        "Set the folded loop on the floor with the gap towards +x and screw both feet down. Correct the height by "
        "bending at the feet, not at the ring."
    ),
    "step.loop.soldered.do": (
        "Set the folded loop on the floor with the gap towards +x, level on a block {height} mm high to the sheet's "
        "middle, and fix both feet flat. Correct the height by bending at the feet, not at the ring."
    ),
    "step.loop.do": "Set the loop on the floor with the gap towards +x and fix both feet.",
    "step.loop.tools": "height blocks, square, calliper; iron or screwdriver.",
    "step.loop.wire-bond.join": (
        "this floor takes no soft solder: the feet are threaded with a nut on both sides of the floor, or soldered to "
        "a plate of brass screwed to it, as the end of the wire schedule says."
    ),
    "step.loop.foil-wire.join": "solder both feet to the foil all round, iron hot and time short: the plastic softens.",
    "step.loop.paint-wire.join": (
        "thread the feet: a nut and a plain washer on both sides of the floor, paint over the washer's edge."
    ),
    "step.loop.plating-wire.join": (
        "thread the feet: a nut and a plain washer on both sides of the floor, bright copper below them."
    ),
    "step.loop.foil-sheet.join": (
        "screws with plain washers, so that the foil does not tear; solder the feet's edges to it, iron hot and time "
        "short."
    ),
    "step.loop.paint-sheet.join": "screws with plain washers; paint once more over the edges of the feet.",
    "step.loop.plating-sheet.join": "screws with plain washers, bright copper below the feet.",
    "step.loop.wire.join": "solder both feet to the floor inside and outside, fillets all round the wire.",
    "step.loop.sheet.join": (
        "screws with toothed washers on bright metal; sweat the feet with solder where the floor takes it."
    ),
    "step.loop.soldered.join": (
        "tin floor and feet, solder each foot flat with a fillet all round; where the floor takes no solder, to a "
        "plate of brass or copper screwed to it; on foil hot and short, on paint with conductive glue."
    ),
    "step.loop.measure": (
        "height {height} ±{height_tolerance} mm at four points of the loop; bars {pitch} mm apart, centre to centre; "
        "loop ⌀{diameter} mm; under {limit} ohm loop to can."
    ),
    "step.connector.title": "{n}. Connector",
    "step.connector.do": "Fit the connector from below; its flange lies on bright metal.",
    "step.connector.tools": "screwdriver or hexagon key, torque as the screw's maker states.",
    "step.connector.join": "screws and nuts; no paint or oxide between flange and floor.",
    "step.connector.measure": "under {limit} ohm flange to can; centre pin open to the can (over 10 megohm).",
    "step.coax.title": "{n}. Coax up the bar",
    "step.coax.do": (
        "Lay the coax along the bar at +y from the connector up to the tap. Strip and bend the core as its page says "
        "so that its axis crosses at {tap} mm above the floor."
    ),
    "step.coax.tools": "knife, fine saw, calliper, iron with a broad tip.",
    "step.coax.join": "solder the jacket to the bar along its whole length; keep heat short, the dielectric creeps.",
    "step.coax.measure": "axis of the crossing {tap} ±{tap_tolerance} mm above the floor; core open to the jacket.",
    "step.capacitor.title": "{n}. Series capacitor",
    "step.capacitor.do": (
        "Fix the far part of the capacitor to the bar at -y and slide it over the core to an overlap of "
        "{overlap} mm ({capacitance} pF)."
    ),
    "step.capacitor.tools": "calliper, tweezers, iron.",
    "step.capacitor.join": "solder to the bar at -y; leave it free to slide until the bench test is done.",
    "step.capacitor.measure": "core open to the can (over 10 megohm); overlap {overlap} mm.",
    "step.radome.title": "{n}. Cover",
    "step.radome.do": "Fit the cover after the bench test; test again with it on, it lowers the resonance a little.",
    "step.radome.join": "snap or silicone sealant; leave the drain holes open.",
    "step.other.title": "{n}. Remaining parts",
    "step.other.do": "Fit the remaining parts as drawn.",
    "step.last.title": "{n}. Close",
    "step.last.do": (
        "Do the bench test. When the reflection is right, secure the capacitor with a drop of varnish or low-loss "
        "glue, measure again, seal the connector, and keep the drain holes open and at the lowest point."
    ),
    "bench.set_up_head": "Set-up",
    "bench.set_up": (
        "Calibrate the analyser at the end of its cable. Point the feed at the open sky or at absorber, nothing "
        "metallic within two metres in front, hands and cable behind the flange. Load predicted.s1p as a "
        "second trace."
    ),
    "bench.table_head": "What is seen, what to do",
    "bench.table_intro": (
        "Change one thing at a time, by half the amount first, and measure again. Amounts come from the computed "
        "sensitivities of this feed; twice the frequency error needs twice the amount."
    ),
    "bench.seen": "Seen",
    "bench.do": "Turn, bend or cut",
    "bench.amount": "By how much",
    "bench.low": "Dip {shift} MHz below the target",
    "bench.high": "Dip {shift} MHz above the target",
    "bench.series_capacitor_pf.more": "Push the capacitor further over the core (more overlap).",
    "bench.series_capacitor_pf.less": "Pull the capacitor back (less overlap).",
    "bench.loop_height_mm.more": "Lift the loop: bend the bars or put shims under the feet.",
    "bench.loop_height_mm.less": "Lower the loop: press it down evenly at the bars.",
    "bench.loop_diameter_mm.more": "Open the loop a little all round; check that it is still round and level.",
    "bench.loop_diameter_mm.less": "Close the loop a little all round; check that it is still round and level.",
    "bench.loop_diameter_mm.less.strip": "Close the loop a little all round, or file the strip's outer edge.",
    "bench.can_depth_mm.more": "Put a close-fitting ring on the rim (deeper can).",
    "bench.can_depth_mm.less": "File the rim down evenly (shallower can).",
    "bench.amount_mm": "{change} mm ({rate} MHz per mm)",
    "bench.amount_pf": "{change} pF, about {travel} mm of overlap",
    "bench.amount_tap": "{change} mm (first half of it, then measure)",
    "bench.inductive": "At the target the trace lies in the upper half of the chart, +j{x} ohm",
    "bench.capacitive": "At the target the trace lies in the lower half of the chart, -j{x} ohm",
    "bench.low_r": "Dip in place, but the trace passes left of the centre, about {r} ohm",
    "bench.high_r": "Dip in place, but the trace passes right of the centre, about {r} ohm",
    "bench.tap_up": "Move the crossing up the bars.",
    "bench.tap_down": "Move the crossing down the bars.",
    "bench.no_dip": "No dip at all, trace at the rim of the chart",
    "bench.no_dip_do": "Look for a short of core to jacket, an open joint of bar to floor, a missing crossing.",
    "bench.no_dip_amount": "core to can over 10 megohm, bars to can under {limit} ohm",
    "bench.shallow": "Dip in place, shallow, and wider than expected",
    "bench.shallow_do": "Look for loss: poor floor joint, bad lining, flux or paint on the bars.",
    "bench.shallow_amount": "floor to rim under {limit} ohm",
    "bench.hand": "Trace moves when the cable is touched",
    "bench.hand_do": "Tighten the connector; check that its flange lies on bright metal all round.",
    "bench.hand_amount": "until touching the cable changes nothing",
    "bench.capacitor_head": "Series capacitor by overlap",
    "bench.pf": "Capacitance, pF",
    "bench.overlap": "Overlap, mm",
    "bench.capacitor_note": (
        "Set value {capacitance} pF at an overlap of {overlap} mm, {slope} pF per mm. {formula} ({source})."
    ),
    "mount.head": "At the focus",
    "mount.how": "How to check",
    "mount.picture": "Feed drawn three times as large as the dish",
    "mount.focal": "Focal length f",
    "mount.focal_how": "diameter times f/D",
    "mount.depth": "Depth of the dish at its middle",
    "mount.depth_how": "D² / (16 f); measure it from a straight edge across the rim",
    "mount.phase": "Phase centre",
    "mount.phase_how": "above the floor's inner face, towards the dish",
    "mount.flange_to_focus": "Flange face to focus",
    "mount.flange_how": "from the floor's outer face forward to the focus",
    "mount.vertex_to_flange": "Vertex of the dish to flange face",
    "mount.vertex_how": "along the axis, with a lath or a laser range finder",
    "mount.edge": "Edge of the dish off the axis",
    "mount.edge_how": "2 atan(1 / (4 f/D))",
    "mount.step1": "Measure diameter and depth of the dish and correct f if they do not agree with the table.",
    "mount.step2": (
        "Set the flange face {vertex} mm from the vertex, {focus} mm behind the focus as seen from the dish."
    ),
    "mount.step3": (
        "Turn the feed so that its gap and seam give the polarisation wanted: the field lies along y, across the gap."
    ),
    "mount.step4": (
        "Bring the feed's axis onto the dish's axis: equal distances from four points of the rim to the can's rim."
    ),
    "mount.step5": (
        "Move the feed along the axis by a tenth of a wavelength to both sides while listening to a steady "
        "source; keep the best."
    ),
    "cautions.head": "Cautions",
    "caution.sheet.head": "Sharp sheet",
    "caution.sheet": (
        "Cut edges and corners of sheet and swarf cut deep. Wear gloves while carrying, deburr before anything else, "
        "clamp sheet before drilling, wear eye protection."
    ),
    "caution.solder.head": "Hot solder and fumes",
    "caution.solder": (
        "Large parts stay hot for minutes. Solder in moving air and do not breathe flux smoke; wash hands "
        "after leaded "
        "solder. Do not heat PTFE until it smokes, its fumes are poisonous. Keep fire-fighting means at hand "
        "when a torch is used."
    ),
    "caution.glue.head": "Glue and cleaning agents",
    "caution.glue": (
        "Epoxy and solvents irritate skin and lungs: gloves, fresh air, no flame. Follow the data sheet of the product."
    ),
    "caution.tools.head": "Machines",
    "caution.tools": (
        "No gloves or loose sleeves at drill and lathe. Spring-back throws wire and sheet: stand out of its way."
    ),
    "caution.paint.head": "Conductive paints, plating and dust",
    "caution.paint": (
        "Metal-filled paints and the dust from sanding printed, plated or copper-coated parts are harmful to "
        "breathe: "
        "mask, wet sanding, good air. Keep such waste out of the drain."
    ),
    "caution.mast.head": "Masts, roofs and falling parts",
    "caution.mast": (
        "Work on a roof, ladder or mast only secured and with a second person. Keep well clear of power "
        "lines: a mast or "
        "dish that falls must not be able to reach one. Tie tools and the feed while working."
    ),
    "caution.lightning.head": "Lightning and earthing",
    "caution.lightning": (
        "An outdoor dish needs earthing and surge protection by the rules of the place; the DC path of this "
        "feed is no "
        "lightning protection. Do not work on it when a thunderstorm is near."
    ),
    "caution.transmit.head": "Transmitting",
    "caution.transmit": (
        "Do not transmit into an open feed within reach of people, or look into a feed that is fed with "
        "power: the field "
        "in and before the aperture can exceed the limits for people. Transmit only with a licence and within the "
        "capacitor's voltage. Disconnect the power before touching the feed."
    ),
    "caution.sun.head": "The sun at the focus",
    "caution.sun": (
        "A shiny dish that looks at the sun brings its light and heat to the focus: it burns skin and eyes, "
        "sets fire and "
        "melts printed parts. Cover the dish or turn it away while working at the focus, and park it away "
        "from the sun."
    ),
    "caution.lift.head": "Moving dish",
    "caution.lift": (
        "A motor-driven dish moves without warning. Lock it and take its supply off before reaching into it."
    ),
    "caution.codes.head": "Rules come first",
    "caution.codes": (
        "The building, electrical, radio and safety rules of the place and the practice of licensed trades "
        "come before "
        "anything on these sheets. Where they differ, follow them."
    ),
    "limits.head": "Limits of the figures",
    "limits.1": (
        "The figures hold for the drawn sizes; the uncertainty is on the page of settings, what tolerances do"
        " on the bench page."
    ),
    "limits.2": (
        "Aperture efficiency is without blockage by feed and supports and without errors of the dish's surface."
    ),
    "limits.3": (
        "A cover, ice, water, paint on the loop or a metal part in front of the aperture shift the resonance."
    ),
    "limits.4": "The cable, the amplifier and what it adds in noise are as given in the job, not measured.",
    "limits.5": (
        "Bend allowances and spring-back are starting values: make the test bend first when the material is new."
    ),
}
