import { memo, type ReactNode } from "react";
import { type Camera, homeCamera } from "~/lib/view/camera";
import type { Mark, Token } from "~/lib/view/mark";
import { viewMarks } from "~/lib/view/marks";
import { buildScene, type Figure, type Scene, type SceneInput } from "~/lib/view/scene";
import {
  type Cell,
  cellOf,
  homeRotation,
  type Point,
  projector,
  type Stage,
  stageOf,
} from "~/lib/view/stage";
import {
  atomToken,
  BALL_RADIUS,
  isBall,
  layerOf,
  lineOpacity,
  lineShare,
  lineWidth,
  stickRadius,
} from "./look";
import { MarkLayer, tokenColour } from "./mark-layer";

/** Conformers in their tint beyond this make the page heavy and the picture no clearer. */
export const MOST_FAINT_IN_STILL = 40;
/** CSS pixels of ground around sticks in atom colours. */
const CASING = 1.5;
/** Share of the ground that what lies farthest back takes on. */
const MOST_FOG = 0.45;

/**
 * The view without WebGL: the same scene from the same camera as SVG. It stands in until the canvas is ready, where
 * there is none, in print, and wherever a page shows a small picture.
 */
export const Still = memo(function Still({
  scene,
  stage,
  camera,
  marks,
  label,
  className = "",
}: {
  scene: Scene;
  stage: Stage;
  camera: Camera;
  marks: readonly Mark[];
  label: string;
  className?: string;
}) {
  return (
    <svg
      viewBox={`0 0 ${stage.width} ${stage.height}`}
      className={`block size-full ${className}`}
      role="img"
      aria-label={label}
    >
      <StillFigures scene={scene} stage={stage} camera={camera} />
      <g data-marks="">
        <MarkLayer marks={marks} />
      </g>
    </svg>
  );
});

/** A still picture from data alone, at a fixed size. */
export function StillPicture({
  width,
  height,
  picked = [],
  bar = true,
  label,
  className = "",
  ...input
}: SceneInput & {
  width: number;
  height: number;
  picked?: readonly number[];
  /** False leaves the scale bar out: in pictures too small for it. */
  bar?: boolean;
  label: string;
  className?: string;
}) {
  const scene = buildScene(input);
  const rotation = homeRotation(input.elements, input.bonds, input.conformers[0]?.positions ?? null);
  const stage = stageOf(scene, rotation, width, height, bar ? "framed" : "bare");
  const camera = homeCamera(rotation);
  const marks = viewMarks({ scene, stage, camera, picked, pickText: null, numbers: false, bar });
  return (
    <Still scene={scene} stage={stage} camera={camera} marks={marks} label={label} className={className} />
  );
}

function StillFigures({ scene, stage, camera }: { scene: Scene; stage: Stage; camera: Camera }): ReactNode {
  const only = cellOf(stage, 0);
  const total = scene.faint.length + scene.strong.length;
  const thinner = lineShare(stage.scale * camera.zoom);
  return (
    <>
      {scene.faint.slice(-MOST_FAINT_IN_STILL).map((figure) => (
        <path
          key={figure.index}
          d={bondPath(figure, projector(stage, camera, only))}
          fill="none"
          stroke={lineColour(figure)}
          strokeWidth={lineWidth(figure.step) * thinner}
          strokeOpacity={lineOpacity(figure.step, total)}
          strokeLinecap="round"
        />
      ))}
      {scene.strong
        .map((figure, place) => (
          <Sticks
            key={figure.index}
            scene={scene}
            figure={figure}
            behind={scene.mode === "overlay" ? place : 0}
            stage={stage}
            camera={camera}
            cell={cellOf(stage, place)}
          />
        ))
        .reverse()}
    </>
  );
}

function lineColour(figure: Figure): string {
  if (figure.held) return tokenColour("held-edge");
  return tokenColour(figure.step === null ? "edge" : `depth-${figure.step}`);
}

function bondPath({ positions, bonds }: Figure, project: ReturnType<typeof projector>): string {
  let path = "";
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const a = project(positions, bonds[k] ?? 0);
    const b = project(positions, bonds[k + 1] ?? 0);
    path += `M${a.x.toFixed(1)} ${a.y.toFixed(1)}L${b.x.toFixed(1)} ${b.y.toFixed(1)}`;
  }
  return path;
}

/** A stick from an atom to another in one or two colours, or a ball (`to` null). */
interface Piece {
  key: string;
  from: Point;
  to: Point | null;
  colours: readonly [Token, Token];
  width: number;
  z: number;
}

function Sticks({
  scene,
  figure,
  behind,
  stage,
  camera,
  cell,
}: {
  scene: Scene;
  figure: Figure;
  behind: number;
  stage: Stage;
  camera: Camera;
  cell: Cell;
}) {
  const layer = layerOf(behind, scene.faint.length > 0);
  const { own } = layer;
  const casing = tokenColour(figure.held && !figure.change ? "held-edge" : "view");
  // Mixed with the ground, not translucent: where sticks meet they would darken each other.
  const paint = (token: Token, z: number) =>
    `color-mix(in srgb, ${tokenColour(token)} ${Math.round(100 * own * (1 - fog(z, stage.reach)))}%, ${tokenColour("view")})`;
  return pieces(scene, figure, layer, stage.scale * camera.zoom, projector(stage, camera, cell)).map(
    (piece) =>
      piece.to === null ? (
        <circle
          key={piece.key}
          cx={piece.from.x.toFixed(1)}
          cy={piece.from.y.toFixed(1)}
          r={(piece.width / 2).toFixed(1)}
          fill={paint(piece.colours[0], piece.z)}
        />
      ) : (
        <g key={piece.key} strokeLinecap="round" strokeWidth={piece.width.toFixed(1)}>
          <path
            d={segment(piece.from, piece.to)}
            stroke={casing}
            strokeWidth={(piece.width + 2 * CASING).toFixed(1)}
            strokeLinecap="butt"
          />
          {piece.colours[0] === piece.colours[1] ? (
            <path d={segment(piece.from, piece.to)} stroke={paint(piece.colours[0], piece.z)} />
          ) : (
            <>
              <path
                d={segment(piece.from, half(piece.from, piece.to))}
                stroke={paint(piece.colours[0], piece.z)}
              />
              <path
                d={segment(half(piece.from, piece.to), piece.to)}
                stroke={paint(piece.colours[1], piece.z)}
              />
            </>
          )}
        </g>
      ),
  );
}

/** Farthest back first, as paint is laid on. */
function pieces(
  scene: Scene,
  figure: Figure,
  { slim, slimBall, wider }: ReturnType<typeof layerOf>,
  scale: number,
  project: ReturnType<typeof projector>,
): Piece[] {
  const z = (atom: number) => scene.elements[atom] ?? 0;
  const found: Piece[] = [];
  const { bonds } = figure;
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const [a, b] = [bonds[k] ?? 0, bonds[k + 1] ?? 0];
    const [from, to] = [project(figure.positions, a), project(figure.positions, b)];
    found.push({
      key: `${a}-${b}`,
      from,
      to,
      colours: [atomToken(z(a)), atomToken(z(b))],
      width: Math.max(1.5, 2 * (slim * stickRadius(z(a), z(b)) + wider) * scale),
      z: (from.z + to.z) / 2,
    });
  }
  const bonded = new Set<number>(bonds);
  for (const atom of scene.shown) {
    if (!isBall(z(atom)) && bonded.has(atom)) continue;
    const from = project(figure.positions, atom);
    const colour = atomToken(z(atom));
    const radius = slimBall * BALL_RADIUS + wider;
    // A ball is painted after the sticks that end in it.
    found.push({
      key: `${atom}`,
      from,
      to: null,
      colours: [colour, colour],
      width: 2 * radius * scale,
      z: from.z + 0.8,
    });
  }
  return found.sort((a, b) => a.z - b.z);
}

/** The canvas's fog: smoothstep over a range in which the far end of the figure takes the most. */
function fog(z: number, reach: number): number {
  const depth = Math.min(1, Math.max(0, ((reach - z) / (2 * reach)) * 0.4666));
  return Math.min(MOST_FOG, depth * depth * (3 - 2 * depth));
}

function segment(a: { x: number; y: number }, b: { x: number; y: number }): string {
  return `M${a.x.toFixed(1)} ${a.y.toFixed(1)}L${b.x.toFixed(1)} ${b.y.toFixed(1)}`;
}

function half(a: Point, b: Point): { x: number; y: number } {
  return { x: (a.x + b.x) / 2, y: (a.y + b.y) / 2 };
}
