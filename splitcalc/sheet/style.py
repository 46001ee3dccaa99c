"""The one style sheet of the page: its layout, its colours in the light and the dark theme.

Rail, picture and bars stand side by side where the page is wide enough; in a narrower one the
bars go under the picture, in a very narrow one all stand below each other. Lengths that the
pictures depend on come from them.
"""

from splitcalc.draw.labels import HEIGHT, WIDTH

STALE = "splitcalc-stale"  # on the page while its picture does not show what the controls say

WAITING = "splitcalc-waiting"  # while the worst logs of a changed machine are searched

ROW = 34  # px, of a check in the bars: two bars and a margin for each

STYLE = f"""<style>
.splitcalc-page {{
  --sc-ink: var(--jp-ui-font-color1, #222); --sc-quiet: var(--jp-ui-font-color2, #666);
  --sc-line: var(--jp-border-color2, #ccc); --sc-dark: #2f4858; --sc-pale: #b9c6cf;
  --sc-red: #b3261e; --sc-pale-red: #e8b9b5; color: var(--sc-ink); font-size: 13px;
  container-type: inline-size; overflow: visible; line-height: 1.35;
}}
[data-jp-theme-light="false"] .splitcalc-page {{
  --sc-dark: #c3d6e2; --sc-pale: #4a5c68; --sc-red: #ff8a80; --sc-pale-red: #8c4540;
}}
[data-jp-theme-light="false"] .splitcalc-stage {{ filter: invert(0.9) hue-rotate(180deg); }}
.splitcalc-page .widget-box, .splitcalc-page .jupyter-widgets {{ overflow: visible; }}
.splitcalc-page .widget-html {{ margin: 0; height: auto; }}
.splitcalc-page .widget-html-content {{ line-height: 1.35; font-size: 13px; }}

.splitcalc-body {{
  display: grid; gap: 4px 14px; align-items: start;
  grid-template: "rail sentence sentence" auto "rail stage side" auto "rail . ." 1fr
                 / 230px {WIDTH}px minmax(242px, 320px);
}}
@container (max-width: 1096px) {{ .splitcalc-body {{
  grid-template: "sentence sentence" auto "rail stage" auto "rail side" auto / 220px {WIDTH}px;
}} }}
@container (max-width: 831px) {{ .splitcalc-body {{
  grid-template: "sentence" auto "rail" auto "stage" auto "side" auto / minmax(0, {WIDTH}px);
}} }}
.splitcalc-rail {{ grid-area: rail; }}
.splitcalc-page .splitcalc-sentence {{
  grid-area: sentence; height: 72px; overflow: auto !important; /* four lines: nothing jumps */
}}
.splitcalc-middle {{ grid-area: stage; }}
.splitcalc-side {{ grid-area: side; display: flex; flex-flow: row wrap; gap: 0 14px; }}
.splitcalc-side > .widget-vbox {{ flex: 1 1 242px; }}

.splitcalc-rail h4, .splitcalc-side h4 {{
  margin: 6px 0 2px; font-size: 12px; font-weight: 600; color: var(--sc-quiet);
  border-bottom: 1px solid var(--sc-line);
}}
.splitcalc-number {{ position: relative; display: block; height: auto; margin: 0 0 2px; }}
.splitcalc-number .widget-slider {{
  width: 100%; height: 40px; margin: 0; flex-wrap: wrap; align-content: flex-start;
}}
.splitcalc-number .widget-slider .widget-label {{
  width: 100%; text-align: left; line-height: 22px; height: 22px;
}}
.splitcalc-number .slider-container {{ width: 100%; margin: 0 8px; height: 18px; }}
.splitcalc-field {{ position: absolute; right: 0; top: 0; width: 104px; margin: 0; height: 22px; }}
.splitcalc-field input {{
  height: 20px !important; text-align: right; font-variant-numeric: tabular-nums;
  border-color: transparent !important; background: transparent; padding: 0 4px;
}}
.splitcalc-field input:hover, .splitcalc-field input:focus {{
  border-color: var(--sc-quiet) !important;
}}
.splitcalc-error {{ color: var(--sc-red); font-size: 12px; white-space: normal; }}
.splitcalc-choice {{ width: 100%; margin: 0 0 3px; display: flex; flex-flow: row nowrap; }}
.splitcalc-choice .widget-label {{ width: 72px; text-align: left; }}
.splitcalc-choice .widget-toggle-button {{
  width: auto; padding: 0 9px; height: 24px; line-height: 24px; margin: 0;
}}
.splitcalc-choice select {{ height: 24px; }}
.splitcalc-page .jupyter-button {{ font-size: 12px; height: 26px; line-height: 26px; }}
.splitcalc-buttons {{ display: flex; flex-flow: row wrap; gap: 4px; }}
.splitcalc-buttons .jupyter-button {{ width: auto; flex: 1 1 auto; margin: 0; }}
.splitcalc-side .splitcalc-buttons {{ margin: 4px 0; }}
.splitcalc-side .jupyter-button {{ padding: 0 5px; }}
.splitcalc-view {{ display: flex; height: 45px; overflow: hidden; }}
.splitcalc-view .splitcalc-choice {{ width: auto; flex: none; }}
.splitcalc-past {{ margin-left: 12px !important; overflow: auto; }}
.splitcalc-past .widget-html-content {{ font-size: 11px; line-height: 15px; }}
.splitcalc-message {{ white-space: normal; font-size: 12px; }}

.splitcalc-stage {{ position: relative; width: {WIDTH}px; height: {HEIGHT}px; }}
.splitcalc-stage img {{ position: absolute; inset: 0; max-width: none; margin: 0; }}
.splitcalc-labels {{ position: absolute; inset: 0; pointer-events: none; }}
.splitcalc-labels span {{
  position: absolute; white-space: nowrap; font: 12px/13px sans-serif;
  text-shadow: 0 0 2px #fff, 0 0 3px #fff; background: #ffffffa0; border-radius: 3px;
}}
.splitcalc-page .splitcalc-equations {{
  width: {WIDTH}px; height: {HEIGHT}px; overflow: auto !important;
}}
.{STALE} .splitcalc-stage img, .{STALE} .splitcalc-labels, .{STALE} .splitcalc-equations,
 .{STALE} .splitcalc-drawn {{
  opacity: 0.25; filter: grayscale(1);
}}
.{WAITING} .sc-worst {{ opacity: 0.35; }}

.splitcalc-checks {{ position: relative; display: grid; grid-template-columns: 96px 1fr; }}
.splitcalc-names .jupyter-button {{
  width: 96px; height: {ROW}px; line-height: 14px; margin: 0; padding: 0 6px 0 2px;
  white-space: normal; text-align: right; background: none; font-size: 12px;
}}
.splitcalc-names .jupyter-button.mod-active {{ box-shadow: none; }}
.splitcalc-names .splitcalc-chosen {{ font-weight: 700; border-right: 3px solid var(--sc-ink); }}
.sc-row {{
  height: {ROW}px; display: grid; grid-template: 15px 15px / 56px 1fr 44px; align-content: center;
  font-size: 11px; line-height: 15px; font-variant-numeric: tabular-nums;
}}
.sc-set {{ color: var(--sc-quiet); padding-left: 4px; }}
.sc-track {{ position: relative; border-left: 1px solid var(--sc-quiet); }}
.sc-track i {{ position: absolute; left: 0; top: 2px; height: 11px; background: var(--sc-pale); }}
.sc-track b {{ position: absolute; left: 0; top: 5px; height: 5px; background: var(--sc-dark); }}
.sc-track u {{
  position: absolute; top: 1px; height: 13px; border-left: 2px dotted var(--sc-quiet);
}}
.sc-track s {{ position: absolute; top: -2px; height: 19px; border-left: 1px solid var(--sc-ink); }}
.sc-track i.short {{ background: var(--sc-pale-red); }}
.sc-track b.short {{ background: var(--sc-red); }}
@container (min-width: 1097px) and (max-width: 1170px) {{
  .sc-set {{ display: none; }}
  .sc-row {{ grid-template-columns: 1fr 44px; }}
}}
.sc-margin {{ text-align: right; }}
.sc-margin.short {{ color: var(--sc-red); font-weight: 600; }}
.sc-none {{ grid-column: 2 / 4; color: var(--sc-quiet); white-space: nowrap; overflow: hidden; }}
.sc-key {{ color: var(--sc-quiet); font-size: 11px; }}
</style>"""
