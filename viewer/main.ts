import { Application } from './application.ts';

const application = new Application();
window.vesselwrightViewer = {
  state: () => application.state(),
  picture: () => application.picture(),
  screenOf: (vessel) => application.screenOf(vessel),
};
await application.openPage(new URL(location.href));
